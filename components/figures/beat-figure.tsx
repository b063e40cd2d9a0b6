'use client';

import { linePath } from '@/lib/figures/paths';
import { Sym } from '../ui/sym';
import { Figure } from './figure';

/** Two neighbouring frequencies over the drawn stretch, in whole turns. */
const turns = [13, 16] as const;

/** Frontispiece of the sign-in page: two tones and the beat they make. */
export function BeatFigure() {
  return (
    <Figure
      number={1}
      caption={
        <>
          Two fields of neighbouring mass oscillate at neighbouring frequencies in ln <Sym base="κ" />; mixed,
          they beat.
        </>
      }
      label="Two close frequencies and the beat they make"
      fileName="beat"
      save={false}
      height={336}
      heightNarrow={259}
    >
      {({ width, narrow }) => <Beat width={width} narrow={narrow} />}
    </Figure>
  );
}

function Beat({ width, narrow }: { width: number; narrow: boolean }) {
  const left = narrow ? 84 : 96;
  const rows = narrow
    ? { first: 34, second: 84, sum: 190, small: 12, large: 30 }
    : { first: 34, second: 96, sum: 240, small: 16, large: 42 };
  const n = 600;
  const share = Array.from({ length: n + 1 }, (_, i) => i / n);
  const x = share.map((s) => left + (width - left) * s);
  const tone = (turn: number, s: number) => Math.sin(2 * Math.PI * turn * s);
  const line = (y: (s: number) => number) => linePath(x, share.map(y));
  const envelope = (s: number) => 2 * rows.large * Math.abs(Math.cos(Math.PI * (turns[1] - turns[0]) * s));
  return (
    <svg width={width} height={narrow ? 259 : 336} aria-hidden="true">
      <path className="ln f1" d={line((s) => rows.first - rows.small * tone(turns[0], s))} />
      <path className="ln f2" d={line((s) => rows.second - rows.small * tone(turns[1], s))} />
      <path className="env" d={line((s) => rows.sum - envelope(s))} />
      <path className="env" d={line((s) => rows.sum + envelope(s))} />
      <path
        className="sum"
        d={line((s) => rows.sum - rows.large * (tone(turns[0], s) + tone(turns[1], s)))}
      />
      <text className="at" x="0" y={rows.first + 4}>
        field 1
      </text>
      <text className="at" x="0" y={rows.second + 4}>
        field 2
      </text>
      <text className="at it" x="0" y={rows.sum + 4}>
        together
      </text>
    </svg>
  );
}
