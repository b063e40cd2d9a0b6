import type { ReactNode } from 'react';
import Link from 'next/link';
import { FoldBody, FoldButton, type Fold } from './fold';
import { SectionRow, SheetRow } from './sheet';
import { StateWord, type State } from './state-word';

export interface PageHeadProps {
  title: ReactNode;
  kicker?: ReactNode;
  byline?: ReactNode;
  abstract?: ReactNode;
  margin?: ReactNode;
  children?: ReactNode;
}

export function PageHead({ title, kicker, byline, abstract, margin, children }: PageHeadProps) {
  return (
    <SheetRow margin={margin}>
      {kicker ? <p className="mb-1 font-controls text-note text-ink-2">{kicker}</p> : null}
      <h1 className="mb-2 max-w-figure text-title">{title}</h1>
      {byline ? <p className="mb-3 text-small text-ink-2">{byline}</p> : null}
      {abstract ? <p className="mb-4 text-body">{abstract}</p> : null}
      {children}
    </SheetRow>
  );
}

function Numbered({ number, title }: { number?: number; title: ReactNode }) {
  return (
    <>
      {number === undefined ? null : <span className="mr-[0.5em] text-ink-2">{number}</span>}
      {title}
    </>
  );
}

export interface SectionProps {
  id: string;
  number?: number;
  title: string;
  state?: State;
  margin?: ReactNode;
  /** Stands first under the page's head: no rule above. */
  first?: boolean;
  /** Given: the section folds from its title. */
  fold?: Fold;
  children: ReactNode;
}

/** An open section: a rule in ink, the number as part of the heading, the state at its right. */
export function Section({ id, number, title, state, margin, first, fold, children }: SectionProps) {
  const headingId = `${id}-title`;
  const bodyId = `${id}-body`;
  const heading = <Numbered number={number} title={title} />;
  return (
    <SectionRow
      id={id}
      labelledBy={headingId}
      fold={fold?.state}
      margin={margin}
      marginLabel={`Record and remarks, ${title}`}
    >
      <div
        className={`pb-8 ${margin ? 'max-desk:pb-2' : ''} ${first ? '' : 'border-t border-ink pt-[13px]'} folded:border-hairline folded:pb-2 print:pb-2`}
      >
        <div className="mb-2 flex items-baseline gap-2 folded:mb-0">
          <h2 id={headingId} className="text-heading folded:text-entry">
            {fold ? (
              <FoldButton controls={bodyId} fold={fold}>
                {heading}
              </FoldButton>
            ) : (
              heading
            )}
          </h2>
          {state ? (
            <span className="ml-auto">
              <StateWord kind={state.kind}>{state.word}</StateWord>
            </span>
          ) : null}
        </div>
        {fold ? (
          <>
            <p className="mb-0 hidden text-small text-ink-2 folded:block">{fold.sentence}</p>
            <FoldBody id={bodyId} state={fold.state}>
              {children}
            </FoldBody>
          </>
        ) : (
          children
        )}
      </div>
    </SectionRow>
  );
}

export interface FoldedSectionProps {
  id: string;
  number?: number;
  title: string;
  state?: State;
  /** Address that opens it. */
  href?: string;
  /** Or what opens it in the browser. */
  onOpen?: () => void;
  /** One sentence on what stands inside. */
  children?: ReactNode;
}

/** A folded section: a hairline, its title and one sentence. */
export function FoldedSection({ id, number, title, state, href, onOpen, children }: FoldedSectionProps) {
  const heading = <Numbered number={number} title={title} />;
  const look = 'text-ink no-underline hover:underline hover:decoration-1';
  return (
    <SheetRow id={id} className="fold-row">
      <div className="grid grid-cols-[minmax(0,1fr)_auto] items-start gap-x-3 border-t border-hairline pt-[13px] pb-2 max-tablet:grid-cols-1">
        <h2 className="text-entry">
          {href ? (
            <Link href={href} scroll={false} className={look}>
              {heading}
            </Link>
          ) : onOpen ? (
            <button type="button" aria-expanded={false} onClick={onOpen} className={`text-left ${look}`}>
              {heading}
            </button>
          ) : (
            heading
          )}
        </h2>
        {state ? (
          <span className="pt-[4px] text-note max-tablet:pt-0">
            <StateWord kind={state.kind}>{state.word}</StateWord>
          </span>
        ) : null}
        {children ? <p className="col-start-1 mb-0 text-small text-ink-2">{children}</p> : null}
      </div>
    </SheetRow>
  );
}

export function Subheading({ id, children }: { id?: string; children: ReactNode }) {
  return (
    <h3 id={id} className="mt-4 mb-1 text-subheading">
      {children}
    </h3>
  );
}
