'use client';

import { useRouter } from 'next/navigation';
import { useState } from 'react';
import { asRequestError, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Asking } from '@/components/ui/asking';
import { SelectField } from '@/components/ui/field';
import { Stamp } from '@/components/ui/num';
import { DataTable } from '@/components/ui/table';
import { WordButton } from '@/components/ui/word-button';
import type { Group, Member, Role } from '@/lib/schemas';
import { roleOptions, roleSentence, type Permission } from './role-words';

/** What is being asked about a member. */
interface Question {
  kind: 'role' | 'remove' | 'leave';
  member: Member;
}

const buttonId = (kind: Question['kind'], userId: string) => `${kind}-${userId}`;

/** After an answer the focus goes back to where the question came from, or to the table if that is gone. */
function focusAgain({ kind, member }: Question): void {
  requestAnimationFrame(() =>
    (
      document.getElementById(buttonId(kind, member.userId)) ?? document.getElementById('members-list')
    )?.focus(),
  );
}

function RoleQuestion({
  member,
  permissions,
  busy,
  onChange,
  onKeep,
}: {
  member: Member;
  permissions: readonly Permission[];
  busy: boolean;
  onChange: (role: Role) => void;
  onKeep: () => void;
}) {
  const [role, setRole] = useState<Role>(member.role);
  return (
    <Asking
      question={`Give ${member.email}, now ${member.role}, another role? It holds at once, and a mail tells of it.`}
      act={role === member.role ? 'Change the role' : `Make ${role}`}
      keep={`Leave as ${member.role}`}
      busy={busy ? 'Changing the role …' : undefined}
      onAct={() => (role === member.role ? onKeep() : onChange(role))}
      onKeep={onKeep}
    >
      <div className="max-w-[460px]">
        <SelectField
          label="New role"
          name="new-role"
          value={role}
          options={roleOptions}
          onChange={(event) => setRole(event.target.value as Role)}
          help={roleSentence(role, permissions)}
        />
      </div>
    </Asking>
  );
}

const refusals = {
  role: 'The role was not changed',
  remove: 'Nobody was removed',
  leave: 'You have not left the group',
};

export interface MemberTableProps {
  group: Group;
  /** Who looks at it. */
  reader: string;
  permissions: readonly Permission[];
  onChanged: () => Promise<unknown>;
}

/** Members with role and beginning; a lead changes and removes them, everyone may leave. */
export function MemberTable({ group, reader, permissions, onChanged }: MemberTableProps) {
  const router = useRouter();
  const [asked, setAsked] = useState<Question | null>(null);
  const [busy, setBusy] = useState(false);
  const [error, setError] = useState<{ kind: Question['kind']; error: RequestError } | null>(null);
  const [said, setSaid] = useState('');
  const { members, may } = group;
  const onlyLead = members.filter(({ role }) => role === 'lead').length === 1;
  const path = (userId: string) => `/api/v1/groups/${group.id}/members/${userId}`;

  function ask(question: Question | null) {
    if (question === null && asked) focusAgain(asked);
    setError(null);
    setSaid('');
    setAsked(question);
  }

  async function act(question: Question, doing: () => Promise<unknown>, done: string) {
    setBusy(true);
    setError(null);
    try {
      await doing();
      if (question.kind === 'leave') {
        router.push('/?groups');
        return;
      }
      await onChanged();
      setSaid(done);
      setAsked(null);
      focusAgain(question);
    } catch (thrown) {
      setError({ kind: question.kind, error: asRequestError(thrown) });
    }
    setBusy(false);
  }

  const changes = may.includes('group.roles') || may.includes('group.remove');
  function actionsOn(member: Member) {
    const own = member.userId === reader;
    if (onlyLead && member.role === 'lead' && own)
      return <span className="font-controls text-note text-ink-2">stays, as the only lead</span>;
    return (
      <span className="inline-flex flex-wrap gap-x-2">
        {may.includes('group.roles') ? (
          <WordButton
            id={buttonId('role', member.userId)}
            of={`of ${member.email}`}
            onClick={() => ask({ kind: 'role', member })}
          >
            Change role
          </WordButton>
        ) : null}
        {own ? (
          <WordButton
            id={buttonId('leave', member.userId)}
            of="the group"
            onClick={() => ask({ kind: 'leave', member })}
          >
            Leave
          </WordButton>
        ) : may.includes('group.remove') ? (
          <WordButton
            id={buttonId('remove', member.userId)}
            of={member.email}
            onClick={() => ask({ kind: 'remove', member })}
          >
            Remove
          </WordButton>
        ) : null}
      </span>
    );
  }

  return (
    <div id="members-list" tabIndex={-1} className="outline-none">
      <DataTable
        label="Members and their roles"
        ruled
        phoneColumns="minmax(0,1fr) auto"
        columns={[
          { key: 'email', head: 'Member', phone: { area: '1 / 1' } },
          { key: 'role', head: 'Role', phone: { area: '1 / 2', end: true } },
          { key: 'since', head: 'Since', phone: { area: '2 / 1', label: 'since' } },
          {
            key: 'actions',
            head: <span className="sr-only">Actions</span>,
            phone: { area: '3 / 1 / 4 / 3' },
          },
        ]}
        rows={members.map((member) => ({
          key: member.userId,
          cells: {
            email: (
              <span className="wrap-anywhere">
                {member.email}
                {member.userId === reader ? <span className="text-ink-2">, you</span> : null}
              </span>
            ),
            role: member.role,
            since: <Stamp at={member.since} />,
            actions: actionsOn(member),
          },
        }))}
      />
      <p className="text-small text-ink-2">
        A group always has a lead.{' '}
        {changes
          ? 'Its only lead can neither leave nor take another role before another member is made lead. '
          : 'Leads change roles and invite. '}
        Whoever leaves or is removed no longer sees the group; what they did stays in its record under their
        name.
      </p>
      {asked?.kind === 'role' ? (
        <RoleQuestion
          key={asked.member.userId}
          member={asked.member}
          permissions={permissions}
          busy={busy}
          onKeep={() => ask(null)}
          onChange={(role) =>
            void act(
              asked,
              () => send('PATCH', path(asked.member.userId), { role }),
              `${asked.member.email} is ${role} from now on.`,
            )
          }
        />
      ) : null}
      {asked && asked.kind !== 'role' ? (
        <Asking
          key={`${asked.kind}-${asked.member.userId}`}
          question={
            asked.kind === 'leave'
              ? `Leave “${group.name}”? You no longer see its notebooks and measurements, until a lead invites you again.`
              : `Remove ${asked.member.email}, ${asked.member.role}, from “${group.name}”? A mail tells them.`
          }
          act={asked.kind === 'leave' ? 'Leave the group' : 'Remove from the group'}
          keep={asked.kind === 'leave' ? 'Stay' : 'Keep them'}
          busy={busy ? (asked.kind === 'leave' ? 'Leaving …' : 'Removing …') : undefined}
          onAct={() =>
            void act(
              asked,
              () => send('DELETE', path(asked.member.userId)),
              `${asked.member.email} is no longer a member.`,
            )
          }
          onKeep={() => ask(null)}
        />
      ) : null}
      {error ? <RequestMessage error={error.error} title={refusals[error.kind]} /> : null}
      <p role="status" className="mb-1 min-h-[21px] font-controls text-note text-ink-2">
        {said}
      </p>
    </div>
  );
}
