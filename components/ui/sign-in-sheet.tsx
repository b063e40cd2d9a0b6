import type { ReactNode } from 'react';

/** A page without contents: the title and a form at the left, a figure at the right. */
export function SignInSheet({
  title,
  lede,
  figure,
  children,
}: {
  title: ReactNode;
  lede?: ReactNode;
  figure?: ReactNode;
  children: ReactNode;
}) {
  return (
    <main
      id="text"
      tabIndex={-1}
      className="mx-auto grid max-w-page grid-cols-[minmax(0,460px)_minmax(0,640px)] items-start justify-between gap-8 px-gutter py-16 outline-none max-desk:grid-cols-1 max-desk:pt-8 max-tablet:pt-4"
    >
      <div className="max-w-[640px]">
        <h1 className="mb-3 text-title">{title}</h1>
        {lede ? <p className="mb-6 text-entry text-ink-2">{lede}</p> : null}
        {children}
      </div>
      {figure ? <div className="max-w-[640px] min-w-0 [&>figure]:mt-1">{figure}</div> : null}
    </main>
  );
}
