import { Sym } from '@/components/ui/sym';
import { formatNumber } from '@/lib/figures/format';
import type { CompiledTemplate } from '@/lib/templates';

const colours = ['bg-field-1', 'bg-field-2', 'bg-field-3', 'bg-field-4'];

/** How the one coupling is shared out at these mixing angles: the weights w_i, which add up to one. */
export function WeightBars({
  template,
  x,
}: {
  template: Pick<CompiledTemplate, 'derived'>;
  x: ArrayLike<number>;
}) {
  const weights = template.derived.filter(({ name, field }) => field !== null && /^w\d+$/.test(name));
  if (weights.length === 0) return null;
  return (
    <div className="no-print mt-2 max-w-figure">
      <p className="mb-1 font-controls text-note text-ink-2">Shares of the coupling at these angles</p>
      <dl className="mb-2 grid grid-cols-[auto_minmax(0,1fr)_48px] items-center gap-x-2">
        {weights.map(({ name, symbol, label, field, evaluate }) => {
          const share = evaluate(x);
          return (
            <div key={name} className="contents">
              <dt className="flex items-baseline gap-[10px] font-words text-[17px]/[24px]">
                <Sym {...symbol} />
                <small className="font-controls text-note text-ink-2">{label}</small>
              </dt>
              <dd className="m-0 h-[5px] bg-hairline" aria-hidden="true">
                <div
                  className={`h-full ${colours[(field ?? 0) % 4]}`}
                  style={{ width: `${(100 * Math.min(1, Math.max(0, share))).toFixed(2)}%` }}
                />
              </dd>
              <dd className="m-0 text-right font-numbers text-number">{formatNumber(share, 3)}</dd>
            </div>
          );
        })}
      </dl>
    </div>
  );
}
