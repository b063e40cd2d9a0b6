import type { CSSProperties, ReactNode } from 'react';

export interface Column {
  key: string;
  head: ReactNode;
  /** Right-aligned in the monospaced face. */
  numeric?: boolean;
  /** Centred against rows that hold a figure. */
  middle?: boolean;
  /** Spaces as they are: ends of intervals padded to stand under each other. */
  pre?: boolean;
  /** On a phone: left out, or where it stands in a folded row, with a label before it, at the end of its place. */
  phone?: 'drop' | { area: string; label?: string; end?: boolean };
}

export interface Row {
  key: string;
  cells: { readonly [column: string]: ReactNode };
}

export interface DataTableProps {
  number?: number;
  caption?: ReactNode;
  /** Name for assistive technology where there is no caption. */
  label?: string;
  columns: readonly Column[];
  rows: readonly Row[];
  /** Hairlines between rows: where rows hold more than one line or a figure. */
  ruled?: boolean;
  /** grid-template-columns of a row folded on a phone; the columns' `phone.area`s refer to it. */
  phoneColumns?: string;
}

const headLook =
  'border-t border-b border-t-ink border-b-rule pt-[5px] pb-1 pl-2 align-bottom font-controls text-note whitespace-nowrap text-ink-2 first:pl-0';

function cellLook(column: Column, props: DataTableProps): string {
  const rows = props.ruled
    ? 'pt-[6px] pb-1 group-not-last:border-b group-not-last:border-hairline'
    : 'pt-[3px] pb-[4px] group-first:pt-[10px]';
  const folded = props.phoneColumns
    ? 'max-tablet:[grid-area:var(--area)] max-tablet:border-0! max-tablet:p-0!'
    : 'max-tablet:pl-[8px] max-tablet:first:pl-0';
  return [
    'pl-2 font-normal first:pl-0 group-last:border-b group-last:border-ink',
    rows,
    props.ruled ? '' : 'group-last:pb-[10px]',
    folded,
    column.middle ? 'align-middle' : 'align-baseline',
    column.numeric ? 'text-right font-numbers text-number whitespace-nowrap' : 'text-left',
    column.pre ? 'whitespace-pre' : '',
    column.phone === 'drop' ? 'max-tablet:hidden' : '',
    typeof column.phone === 'object' && column.phone.end ? 'max-tablet:text-right' : '',
  ].join(' ');
}

function area(column: Column): CSSProperties | undefined {
  if (!column.phone || column.phone === 'drop') return undefined;
  return { '--area': column.phone.area } as CSSProperties;
}

function Cell({
  column,
  row,
  props,
  first,
}: {
  column: Column;
  row: Row;
  props: DataTableProps;
  first: boolean;
}) {
  const label = typeof column.phone === 'object' ? column.phone.label : undefined;
  const inside = (
    <>
      {label ? (
        <span
          aria-hidden="true"
          className="mr-[6px] hidden font-controls text-note text-ink-2 max-tablet:inline"
        >
          {label}
        </span>
      ) : null}
      {row.cells[column.key]}
    </>
  );
  const className = cellLook(column, props);
  return first ? (
    <th scope="row" className={className} style={area(column)}>
      {inside}
    </th>
  ) : (
    <td className={className} style={area(column)}>
      {inside}
    </td>
  );
}

/** A table of the article: rules above the head, below it and at the end. It scrolls by keyboard where it is too wide. */
export function DataTable(props: DataTableProps) {
  const { number, caption, label, columns, rows, phoneColumns } = props;
  const name = label ?? (number === undefined ? 'Table' : `Table ${number}`);
  return (
    <>
      {caption ? (
        <p className="mt-4 mb-1 max-w-caption text-small">
          {number === undefined ? null : <b>Table {number}. </b>}
          {caption}
        </p>
      ) : null}
      <div className="mt-3 mb-4 max-w-figure overflow-x-auto" role="region" aria-label={name} tabIndex={0}>
        <table
          aria-label={name}
          className={`w-full border-separate border-spacing-0 text-small ${phoneColumns ? 'max-tablet:block' : ''}`}
        >
          <thead className={phoneColumns ? 'max-tablet:sr-only' : ''}>
            <tr>
              {columns.map((column) => (
                <th
                  key={column.key}
                  scope="col"
                  className={`${headLook} ${column.numeric ? 'text-right' : 'text-left'} ${column.phone === 'drop' ? 'max-tablet:hidden' : ''}`}
                >
                  {column.head}
                </th>
              ))}
            </tr>
          </thead>
          <tbody className={phoneColumns ? 'max-tablet:block max-tablet:border-t max-tablet:border-ink' : ''}>
            {rows.map((row) => (
              <tr
                key={row.key}
                className={`group ${phoneColumns ? 'max-tablet:grid max-tablet:grid-cols-(--fold) max-tablet:items-center max-tablet:border-b max-tablet:border-hairline max-tablet:py-1' : ''}`}
                style={phoneColumns ? ({ '--fold': phoneColumns } as CSSProperties) : undefined}
              >
                {columns.map((column, i) => (
                  <Cell key={column.key} column={column} row={row} props={props} first={i === 0} />
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </>
  );
}
