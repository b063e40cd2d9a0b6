'use client';

import Link from 'next/link';
import useSWR from 'swr';
import { asRequestError, read } from '@/components/api/request';
import { Contents, type ContentsEntry } from '@/components/ui/contents';
import { IndexSection } from '@/components/ui/index-list';
import { Message } from '@/components/ui/message';
import { PageHead } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { inWords } from '@/components/words/counts';
import type { Group } from '@/lib/schemas';
import { Invitations } from './invitations';
import { MemberTable } from './member-table';
import { RenameForm } from './rename-form';
import { RoleTable } from './role-table';
import type { Permission } from './role-words';

function contentsOf({ members, invitations, may }: Group): ContentsEntry[] {
  const open = invitations.length;
  return [
    { href: '#members', number: members.length, title: 'Members' },
    ...(may.includes('group.invite')
      ? [
          {
            href: '#invitations',
            number: open,
            title: 'Invitations',
            note: open ? `${inWords(open)} open` : 'none open',
          },
        ]
      : []),
    { href: '#roles', title: 'What each role may do' },
    ...(may.includes('group.rename') ? [{ href: '#name', title: 'Name' }] : []),
  ];
}

export interface MembersSheetProps {
  initial: Group;
  reader: string;
  permissions: readonly Permission[];
}

/** The people of a group: members, invitations, what each role may do. */
export function MembersSheet({ initial, reader, permissions }: MembersSheetProps) {
  const {
    data: group = initial,
    error,
    mutate,
  } = useSWR(`/api/v1/groups/${initial.id}`, read<Group>, { fallbackData: initial });
  const gone = error !== undefined && asRequestError(error).status === 404;
  return (
    <Sheet contents={<Contents label="Of this page" entries={contentsOf(group)} />}>
      <PageHead title="Members" kicker={group.name}>
        {gone ? (
          <Message level="warning" title="You can’t see this group any more">
            <p>
              Your membership has ended since this page was opened. <Link href="/?groups">Your groups</Link>
            </p>
          </Message>
        ) : null}
      </PageHead>
      <SheetRow>
        <section id="members" aria-label="Members" className="mb-8">
          <MemberTable group={group} reader={reader} permissions={permissions} onChanged={() => mutate()} />
          {group.may.includes('group.audit') ? (
            <p className="text-small">
              Who did what is in <Link href={`/groups/${group.id}/log`}>the group’s log</Link>.
            </p>
          ) : null}
        </section>
        {group.may.includes('group.invite') ? (
          <IndexSection id="invitations" title="Invitations">
            <Invitations group={group} permissions={permissions} onChanged={() => mutate()} />
          </IndexSection>
        ) : null}
        <IndexSection id="roles" title="What each role may do">
          <RoleTable permissions={permissions} />
        </IndexSection>
        {group.may.includes('group.rename') ? (
          <IndexSection id="name" title="Name">
            <RenameForm group={group} onChanged={() => mutate()} />
          </IndexSection>
        ) : null}
      </SheetRow>
    </Sheet>
  );
}
