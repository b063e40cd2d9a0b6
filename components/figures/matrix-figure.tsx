'use client';

import { plain } from '../words/counts';
import { strength } from './correlation-image';
import { Figure, type FigureFacts } from './figure';

export interface MatrixFigureProps extends FigureFacts {
  /** κ of the rows and of the columns. */
  rows: readonly number[];
  columns: readonly number[];
  matrix: readonly (readonly number[])[];
  /** What the two axes are of: "data", "theory". */
  rowName: string;
  columnName: string;
}

const [left, top, below] = [74, 28, 49];
const heights = { wide: 420, narrow: 280 };

/** Places that carry labels: the ends and a few between. */
function labelled(count: number, most: number): number[] {
  const wished = Math.min(count, most);
  if (wished < 2) return [0];
  return [...new Set(Array.from({ length: wished }, (_, t) => Math.round((t * (count - 1)) / (wished - 1))))];
}

/** A matrix from one axis in κ to another, one rectangle for each number that isn't 0; strength as the root of the share of the largest. */
export function MatrixFigure({ rows, columns, matrix, rowName, columnName, ...facts }: MatrixFigureProps) {
  const largest = Math.max(...matrix.map((row) => Math.max(...row.map(Math.abs))));
  return (
    <Figure
      {...facts}
      height={heights.wide}
      heightNarrow={heights.narrow}
      numbers={() => ({
        columns: ['kappa', ...columns.map((_, j) => `w${j + 1}`)],
        rows: matrix.map((row, i) => [rows[i], ...row]),
      })}
    >
      {({ width, narrow }) => {
        const height = narrow ? heights.narrow : heights.wide;
        const across = Math.min(width - left - 12, narrow ? width : 560);
        const up = height - top - below;
        const [cell, line] = [across / columns.length, up / rows.length];
        return (
          <svg width={width} height={height} aria-hidden="true">
            {matrix.flatMap((row, i) =>
              row.map((value, j) =>
                value === 0 ? null : (
                  <rect
                    key={`${i}-${j}`}
                    className={value < 0 ? 'cor-neg' : 'cor-pos'}
                    x={left + j * cell}
                    y={top + up - (i + 1) * line}
                    width={cell}
                    height={line}
                    opacity={strength(value / largest)}
                  />
                ),
              ),
            )}
            <path className="ax" d={`M${left} ${top}V${top + up}H${left + across}`} />
            {labelled(columns.length, narrow ? 3 : 5).map((j) => (
              <g key={`c${j}`}>
                <path className="tk" d={`M${left + (j + 0.5) * cell} ${top + up}v5`} />
                <text className="tl" x={left + (j + 0.5) * cell} y={top + up + 19} textAnchor="middle">
                  {plain(columns[j], 2)}
                </text>
              </g>
            ))}
            {labelled(rows.length, narrow ? 3 : 5).map((i) => (
              <g key={`r${i}`}>
                <path className="tk" d={`M${left} ${top + up - (i + 0.5) * line}h-5`} />
                <text className="tl" x={left - 9} y={top + up - (i + 0.5) * line + 4} textAnchor="end">
                  {plain(rows[i], 2)}
                </text>
              </g>
            ))}
            <text className="at" x={left + across} y={top + up + 41} textAnchor="end">
              <tspan className="it">κ</tspan> of the {columnName}
            </text>
            <text className="at" x={4} y={top - 12}>
              <tspan className="it">κ</tspan> of the {rowName}
            </text>
          </svg>
        );
      }}
    </Figure>
  );
}
