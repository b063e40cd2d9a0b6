'use client';

import { useId, type ReactNode } from 'react';
import { Figure } from './figure';

/** Stands where a figure is withheld while the group is blind: axes, hatching and those words. */
export function WithheldFigure({
  number,
  caption,
  label,
}: {
  number?: number;
  caption: ReactNode;
  label: string;
}) {
  const hatching = useId();
  return (
    <Figure
      number={number}
      caption={caption}
      label={`${label}: withheld while blind`}
      fileName="withheld"
      save={false}
      height={147}
      heightNarrow={126}
    >
      {({ width, narrow }) => {
        const left = narrow ? 36 : 44;
        const right = width - 10;
        const bottom = narrow ? 119 : 140;
        const middle = (left + right) / 2;
        return (
          <svg width={width} height={bottom + 7} aria-hidden="true">
            <defs>
              <pattern id={hatching} width="9" height="9" patternUnits="userSpaceOnUse">
                <path className="veil" d="M-1 1L1 -1M0 9L9 0M8 10L10 8" />
              </pattern>
            </defs>
            <rect
              x={left}
              y="12"
              width={Math.max(0, right - left)}
              height={bottom - 12}
              fill={`url(#${hatching})`}
            />
            <path className="ax" d={`M${left} 12V${bottom}H${right}`} />
            <rect className="sheet" x={middle - 92} y={bottom / 2 - 10} width="184" height="32" />
            <text className="at it" x={middle} y={bottom / 2 + 11} textAnchor="middle">
              withheld while blind
            </text>
          </svg>
        );
      }}
    </Figure>
  );
}
