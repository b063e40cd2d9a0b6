import type { ReactNode } from 'react';
import Link from 'next/link';
import { BrandMark } from './motif';

export interface RunningHeadProps {
  /** Where the brand leads. */
  home: string;
  /** What the page is. */
  where?: ReactNode;
  /** The menu of groups, in place of `where`; on a phone it has a line of its own. */
  menu?: ReactNode;
  links?: { href: string; label: string; current?: boolean }[];
  /** "T. Ibarra, analyst", or a link to sign in. */
  who?: ReactNode;
}

export function RunningHead({ home, where, menu, links = [], who }: RunningHeadProps) {
  return (
    <header className="border-b border-hairline">
      <div className="mx-auto flex max-w-page items-baseline gap-4 px-gutter pt-2 pb-[13px] font-controls text-control font-[450] max-tablet:flex-wrap max-tablet:gap-x-2 max-tablet:gap-y-0 max-tablet:pb-[10px]">
        <Link
          href={home}
          className="inline-flex items-center gap-[10px] font-words text-[18px]/[21px] font-medium text-ink no-underline"
        >
          <BrandMark />
          Beatnote
        </Link>
        {where ? (
          <span
            className={`truncate font-words text-[15px]/[21px] font-normal text-ink-2 italic ${links.length ? 'max-tablet:hidden' : 'max-tablet:order-3 max-tablet:basis-full'}`}
          >
            {where}
          </span>
        ) : null}
        {menu ? (
          <div className="no-print min-w-0 max-tablet:order-3 max-tablet:basis-full">{menu}</div>
        ) : null}
        {links.length ? (
          <nav
            aria-label="Group"
            className="no-print ml-auto flex gap-3 max-tablet:order-4 max-tablet:-mb-[10px] max-tablet:ml-0 max-tablet:basis-full"
          >
            {links.map((link) => (
              <Link
                key={link.href}
                href={link.href}
                aria-current={link.current ? 'page' : undefined}
                className="text-ink no-underline hover:underline aria-[current]:border-b-[1.5px] aria-[current]:border-ink max-tablet:pt-[11px] max-tablet:pb-[12px] max-tablet:aria-[current]:border-b-2"
              >
                {link.label}
              </Link>
            ))}
          </nav>
        ) : null}
        {who ? (
          <span
            className={`no-print whitespace-nowrap text-ink-2 max-tablet:ml-auto max-tablet:border-0 max-tablet:pl-0 ${links.length ? 'border-l border-hairline pl-3' : 'ml-auto'}`}
          >
            {who}
          </span>
        ) : null}
      </div>
    </header>
  );
}
