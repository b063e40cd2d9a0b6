import type { ReactNode } from 'react';

/** The numbers of a running fit; their widths are kept while they count. */
export function RunFigures({ entries }: { entries: { label: string; value: ReactNode }[] }) {
  return (
    <dl className="mt-2 mb-0 grid grid-cols-[repeat(4,auto)] justify-between gap-x-3 max-tablet:grid-cols-2 max-tablet:gap-y-1">
      {entries.map((entry) => (
        <div key={entry.label} className="font-controls text-note text-ink-2">
          <dt>{entry.label}</dt>
          <dd className="m-0 font-numbers text-[17px]/[21px] tracking-[-0.02em] whitespace-nowrap text-ink">
            {entry.value}
          </dd>
        </div>
      ))}
    </dl>
  );
}

/** Progress as a ruler: ten parts, the done part drawn over it. `done` runs from 0 to 1. */
export function Ruler({ done, label }: { done: number; label: string }) {
  const x = 720 * Math.min(1, Math.max(0, done));
  const ticks = Array.from({ length: 11 }, (_, i) => {
    const at = Math.min(719.5, Math.max(0.5, i * 72));
    return `M${at} 16v${i % 5 === 0 ? -8 : -4}`;
  }).join('');
  return (
    <svg
      className="fig-svg mt-2 mb-1 h-[21px] w-full max-w-figure"
      viewBox="0 0 720 22"
      preserveAspectRatio="none"
      role="img"
      aria-label={label}
    >
      <path className="base" vectorEffect="non-scaling-stroke" d="M0 16.5H720" />
      <path className="done" vectorEffect="non-scaling-stroke" d={`M0 16H${x.toFixed(1)}`} />
      <path className="tk" vectorEffect="non-scaling-stroke" d={ticks} />
      <path className="now" vectorEffect="non-scaling-stroke" d={`M${x.toFixed(1)} 2v14`} />
    </svg>
  );
}
