'use client';

import { beatPath, tonePath } from '@/lib/figures/beat';

const brand = beatPath({ width: 39, height: 14, carriers: 5.5, beats: 2, start: 'node' });

/** Two close tones and their envelope, in the head of every page. */
export function BrandMark() {
  const { carrier, upper, lower } = brand;
  return (
    <svg className="fig-svg flex-none" width="40" height="16" viewBox="-0.5 -1 40 16" aria-hidden="true">
      <path className="car" d={carrier} />
      <path className="env" d={upper} />
      <path className="env" d={lower} />
    </svg>
  );
}

/** The rule under a group's name. */
export function BeatRule() {
  const { carrier, upper, lower } = beatPath({
    width: 720,
    height: 20,
    carriers: 36,
    beats: 6,
    start: 'crest',
  });
  return (
    <svg
      className="fig-svg mt-2 mb-4 h-[21px] w-full max-w-figure overflow-hidden"
      viewBox="0 -0.5 720 21"
      preserveAspectRatio="xMinYMid slice"
      aria-hidden="true"
    >
      <path className="car" d={carrier} />
      <path className="env" d={upper} />
      <path className="env" d={lower} />
    </svg>
  );
}

/** End of a text. */
export function BeatEnd() {
  const { carrier, upper, lower } = beatPath({
    width: 160,
    height: 14,
    carriers: 9,
    beats: 2,
    start: 'crest',
  });
  return (
    <div className="flex justify-center pt-6">
      <svg className="fig-svg" width="160" height="16" viewBox="0 -1 160 16" aria-hidden="true">
        <path className="car" d={carrier} />
        <path className="env" d={upper} />
        <path className="env" d={lower} />
      </svg>
    </div>
  );
}

/** A line that breaks off: something has stopped. `at` is the share that was done. */
export function BrokenTone({ at = 0.6 }: { at?: number }) {
  const end = Math.round(720 * Math.min(1, Math.max(0, at)));
  const { carrier } = beatPath({ width: 720, height: 38, carriers: 32.5, beats: 4.13, start: 'crest' });
  const clip = `inset(-2px ${720 - end}px -2px 0)`;
  return (
    <svg
      className="fig-svg mb-2 h-[42px] w-full max-w-figure overflow-hidden"
      viewBox="0 -2 720 42"
      preserveAspectRatio="none"
      aria-hidden="true"
    >
      <path className="car" d={carrier} style={{ clipPath: clip }} vectorEffect="non-scaling-stroke" />
      <path className="zero" d={`M${end} 19H720`} vectorEffect="non-scaling-stroke" />
      <path className="stop" d={`M${end} 5v28`} vectorEffect="non-scaling-stroke" />
    </svg>
  );
}

/** One tone alone: nothing there yet. */
export function SingleTone() {
  return (
    <svg
      className="fig-svg mt-1 mb-4 h-[35px] w-full max-w-figure overflow-hidden"
      viewBox="0 0 720 35"
      preserveAspectRatio="xMinYMid slice"
      aria-hidden="true"
    >
      <g transform="translate(0 9)">
        <path className="env" d={tonePath(720, 18, 30)} />
      </g>
    </svg>
  );
}
