import type { ReactNode } from 'react';
import type { FoldState } from './fold';

/** The grid of a page: contents, text, margin. From 760 px down it is one column. */
export function Sheet({ contents, children }: { contents?: ReactNode; children: ReactNode }) {
  return (
    <div className="mx-auto grid max-w-page grid-cols-[var(--margin-left)_minmax(0,1fr)] items-start gap-x-gutter px-gutter pb-16 max-tablet:block print:block print:max-w-none print:p-0">
      {contents ?? <div />}
      <main id="text" tabIndex={-1} className="min-w-0 pt-8 outline-none max-tablet:pt-3">
        {children}
      </main>
    </div>
  );
}

const grid =
  'grid grid-cols-[minmax(0,var(--figure))_var(--margin-right)] items-start gap-x-gutter max-desk:max-w-figure max-desk:grid-cols-[minmax(0,1fr)] print:block';

/** Record and remarks beside a row; below their section, in two columns, where there is no room. */
export function Margin({
  label,
  lower,
  children,
}: {
  label?: string;
  lower?: boolean;
  children?: ReactNode;
}) {
  return (
    <aside
      aria-label={label}
      className={`folded:hidden max-desk:grid max-desk:grid-cols-2 max-desk:gap-x-4 max-desk:pt-0 max-desk:pb-8 max-tablet:grid-cols-1 print:block print:py-1 ${lower ? 'pt-[24px]' : ''}`}
    >
      {children}
    </aside>
  );
}

export interface SheetRowProps {
  id?: string;
  className?: string;
  margin?: ReactNode;
  children: ReactNode;
}

export function SheetRow({ id, margin, className = '', children }: SheetRowProps) {
  return (
    <div id={id} className={`${grid} ${className}`}>
      <div className="min-w-0">{children}</div>
      {margin ? <Margin>{margin}</Margin> : null}
    </div>
  );
}

export interface SectionRowProps extends SheetRowProps {
  labelledBy: string;
  marginLabel: string;
  /** Given: the section folds. */
  fold?: FoldState;
}

/** The row of a section; its margin starts on the baseline of the heading. A script may set `data-fold` before hydration. */
export function SectionRow({ id, labelledBy, margin, marginLabel, fold, children }: SectionRowProps) {
  return (
    <section
      id={id}
      aria-labelledby={labelledBy}
      data-fold={fold}
      suppressHydrationWarning={fold !== undefined}
      className={`${grid} open-row`}
    >
      <div className="min-w-0">{children}</div>
      {margin ? (
        <Margin lower label={marginLabel}>
          {margin}
        </Margin>
      ) : null}
    </section>
  );
}
