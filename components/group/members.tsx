'use client';

import { useState } from 'react';
import { detailAt, asRequestError, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { EmptyState } from '@/components/ui/empty-state';
import { Field, FieldPair, SelectField } from '@/components/ui/field';
import { DataTable } from '@/components/ui/table';
import type { Group, Role } from '@/lib/schemas';

/** What each role may do, beside the choice of it. */
const roleWords: Record<Role, string> = {
  lead: 'runs the group: invites, releases, and does all that an analyst does',
  analyst: 'uploads measurements, edits notebooks, starts and stops fits',
  referee: 'reads every notebook and judges those of others',
  reader: 'reads what is released',
};

const roleNames = Object.keys(roleWords) as Role[];

/** Members with their roles, in one line: "a, lead · b, c, analysts · d, referee". */
export function membersLine(members: Group['members']): string {
  return roleNames
    .flatMap((role) => {
      const of = members.filter((member) => member.role === role).map(({ email }) => email);
      return of.length ? [`${of.join(', ')}, ${role}${of.length > 1 ? 's' : ''}`] : [];
    })
    .join(' · ');
}

export function Members({ group, onInvited }: { group: Group; onInvited: () => Promise<unknown> | unknown }) {
  return (
    <>
      {group.members.length === 1 ? (
        <EmptyState>Only you. An approval needs a referee who isn’t the analyst of the notebook.</EmptyState>
      ) : (
        <DataTable
          label="Members and their roles"
          columns={[
            { key: 'email', head: 'Member' },
            { key: 'role', head: 'Role' },
            { key: 'may', head: 'May', phone: 'drop' },
          ]}
          rows={group.members.map(({ email, role }) => ({
            key: email,
            cells: { email, role, may: roleWords[role] },
          }))}
        />
      )}
      {group.may.includes('group.invite') ? <InviteForm group={group} onInvited={onInvited} /> : null}
    </>
  );
}

function InviteForm({ group, onInvited }: { group: Group; onInvited: () => Promise<unknown> | unknown }) {
  const [email, setEmail] = useState('');
  const [role, setRole] = useState<Role>('analyst');
  const [error, setError] = useState<RequestError | null>(null);
  const [said, setSaid] = useState('');

  async function invite() {
    setError(null);
    setSaid('');
    try {
      await send('POST', `/api/v1/groups/${group.id}/invitations`, { email: email.trim(), role });
      setSaid(`An invitation to ${email.trim()} as ${role} is on its way.`);
      setEmail('');
      await onInvited();
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
  }

  return (
    <form
      noValidate
      className="mt-2"
      onSubmit={(event) => {
        event.preventDefault();
        void invite();
      }}
    >
      <FieldPair>
        <Field
          label="Invite by e-mail"
          name="email"
          type="email"
          autoComplete="off"
          value={email}
          onChange={(event) => setEmail(event.target.value)}
          error={detailAt(error, 'email') && 'Give an address of the form name@institute.example.'}
          help="Whoever has no account yet gets one by signing in with this address."
        />
        <SelectField
          label="As"
          name="role"
          value={role}
          onChange={(event) => setRole(event.target.value as Role)}
          options={roleNames.map((name) => ({ value: name, label: name }))}
          error={detailAt(error, 'role')}
          help={`${role === 'analyst' ? 'An' : 'A'} ${role} ${roleWords[role]}.`}
        />
      </FieldPair>
      <Buttons>
        <Button type="submit" reason={email.trim() ? undefined : 'Give an address first.'}>
          Invite
        </Button>
      </Buttons>
      <p role="status" className="font-controls text-note text-ink-2">
        {said}
      </p>
      <RequestMessage error={error} title="Nobody was invited" shown={['email', 'role']} />
    </form>
  );
}
