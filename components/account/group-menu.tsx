'use client';

import Link from 'next/link';
import { useEffect, useRef, useState, type KeyboardEvent, type ReactNode } from 'react';
import useSWR from 'swr';
import { read } from '@/components/api/request';
import type { Me } from '@/lib/schemas';
import { mePath } from './session-line';
import { rememberGroup } from './last-group';

const entry =
  'flex min-h-[35px] items-baseline gap-2 px-2 py-[6px] text-ink no-underline hover:bg-paper-sunk focus-visible:bg-paper-sunk max-tablet:min-h-[44px] max-tablet:py-[11px]';

/** Moves the focus among the entries of the menu: arrows, Home and End. */
function move(event: KeyboardEvent<HTMLElement>): void {
  const entries = [...event.currentTarget.querySelectorAll<HTMLElement>('a')];
  const at = entries.indexOf(document.activeElement as HTMLElement);
  const to = { ArrowDown: at + 1, ArrowUp: at - 1, Home: 0, End: entries.length - 1 }[event.key];
  if (to === undefined || entries.length === 0) return;
  event.preventDefault();
  entries[(to + entries.length) % entries.length].focus();
}

export interface GroupMenuProps {
  /** The group that the page belongs to, if it belongs to one. */
  groupId?: string;
  /** What the page is, where it belongs to no group or its name is known. */
  where?: ReactNode;
}

/** Says which group one is in, and opens the list of one's groups: a disclosure of links, for the pointer and the keyboard. */
export function GroupMenu({ groupId, where }: GroupMenuProps) {
  const { data: me } = useSWR(mePath, read<Me>);
  const [open, setOpen] = useState(false);
  const root = useRef<HTMLDivElement>(null);
  const button = useRef<HTMLButtonElement>(null);
  const here = me?.groups.find(({ id }) => id === groupId);

  useEffect(() => {
    if (groupId) rememberGroup(groupId);
  }, [groupId]);

  useEffect(() => {
    if (!open) return;
    const close = (event: Event) => {
      if (event.target instanceof Node && !root.current?.contains(event.target)) setOpen(false);
    };
    document.addEventListener('pointerdown', close);
    document.addEventListener('focusin', close);
    return () => {
      document.removeEventListener('pointerdown', close);
      document.removeEventListener('focusin', close);
    };
  }, [open]);

  return (
    <div
      ref={root}
      className="relative"
      onKeyDown={(event) => {
        if (event.key === 'Escape' && open) {
          setOpen(false);
          button.current?.focus();
        } else if (event.key === 'ArrowDown' && document.activeElement === button.current) {
          event.preventDefault();
          setOpen(true);
          requestAnimationFrame(() => root.current?.querySelector<HTMLElement>('ul a')?.focus());
        } else if (open) move(event);
      }}
    >
      <button
        ref={button}
        type="button"
        aria-expanded={open}
        aria-controls="group-menu"
        onClick={() => setOpen(!open)}
        className="flex max-w-[320px] min-h-[21px] items-center gap-[6px] text-left font-words text-[15px]/[21px] font-normal text-ink-2 italic hover:text-ink max-tablet:min-h-[44px] max-tablet:max-w-full"
      >
        <span className="sr-only">{groupId ? 'Group, ' : 'Your groups, here: '}</span>
        <span className="truncate">{here?.name ?? where ?? 'Groups'}</span>
        <svg
          width="10"
          height="10"
          viewBox="0 0 12 12"
          fill="none"
          stroke="currentColor"
          aria-hidden="true"
          className="flex-none"
        >
          <path d="M2 4l4 4 4-4" />
        </svg>
      </button>
      <ul
        id="group-menu"
        hidden={!open}
        className="absolute top-full left-0 z-20 mt-1 max-h-[70vh] w-[320px] max-w-[calc(100vw-2*var(--gutter))] overflow-auto border border-rule bg-paper py-1"
      >
        {(me?.groups ?? []).map(({ id, name, role }) => (
          <li key={id}>
            <Link
              href={`/groups/${id}`}
              aria-current={id === groupId ? 'true' : undefined}
              onClick={() => setOpen(false)}
              className={`${entry} aria-[current]:shadow-[inset_2px_0_0_var(--action)]`}
            >
              <span className="min-w-0 font-words text-[16px]/[21px] wrap-anywhere">{name}</span>
              <span className="ml-auto text-note text-ink-2">{role}</span>
            </Link>
          </li>
        ))}
        <li className="border-t border-hairline first:border-t-0">
          <Link href="/?groups" onClick={() => setOpen(false)} className={entry}>
            {me && me.groups.length === 0 ? 'You belong to no group yet' : 'All groups, or a new one'}
          </Link>
        </li>
      </ul>
    </div>
  );
}
