'use client';

import { useState } from 'react';
import { asRequestError, detailAt, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Asking } from '@/components/ui/asking';
import { Button, Buttons } from '@/components/ui/button';
import { Field, FieldPair, SelectField } from '@/components/ui/field';
import { Stamp } from '@/components/ui/num';
import { StateWord } from '@/components/ui/state-word';
import { DataTable } from '@/components/ui/table';
import { WordButton } from '@/components/ui/word-button';
import type { Group, Invitation, Role } from '@/lib/schemas';
import { roleOptions, roleSentence, type Permission } from './role-words';

interface Props {
  group: Group;
  permissions: readonly Permission[];
  onChanged: () => Promise<unknown>;
}

function InviteForm({ group, permissions, onChanged }: Props) {
  const [email, setEmail] = useState('');
  const [role, setRole] = useState<Role>('analyst');
  const [busy, setBusy] = useState(false);
  const [error, setError] = useState<RequestError | null>(null);
  const [said, setSaid] = useState('');

  async function invite() {
    const address = email.trim();
    if (busy || !address) return;
    setBusy(true);
    setError(null);
    setSaid('');
    try {
      await send('POST', `/api/v1/groups/${group.id}/invitations`, { email: address, role });
      await onChanged();
      setSaid(`${address} is invited as ${role}. Whoever had an account is a member already.`);
      setEmail('');
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
    setBusy(false);
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
          help="Whoever has an account is a member at once; anyone else when they sign in with this address."
        />
        <SelectField
          label="As"
          name="role"
          value={role}
          onChange={(event) => setRole(event.target.value as Role)}
          options={roleOptions}
          error={detailAt(error, 'role')}
          help={roleSentence(role, permissions)}
        />
      </FieldPair>
      <Buttons note={<span role="status">{said}</span>}>
        <Button
          type="submit"
          busy={busy ? 'Inviting …' : undefined}
          reason={email.trim() || busy || said ? undefined : 'Give an address first.'}
        >
          Invite
        </Button>
      </Buttons>
      <RequestMessage error={error} title="Nobody was invited" shown={['email', 'role']} />
    </form>
  );
}

function OpenInvitations({ group, onChanged }: Omit<Props, 'permissions'>) {
  const [asked, setAsked] = useState<Invitation | null>(null);
  const [busy, setBusy] = useState<{ id: string; kind: 'send' | 'take' } | null>(null);
  const [error, setError] = useState<{ title: string; error: RequestError } | null>(null);
  const [said, setSaid] = useState('');
  const path = (id: string) => `/api/v1/groups/${group.id}/invitations/${id}`;

  async function act(kind: 'send' | 'take', { id, email }: Invitation) {
    if (busy) return;
    setBusy({ id, kind });
    setError(null);
    setSaid('');
    try {
      if (kind === 'send') await send('POST', `${path(id)}/send`);
      else await send('DELETE', path(id));
      await onChanged();
      setAsked(null);
      setSaid(
        kind === 'send'
          ? `The invitation of ${email} was mailed again.`
          : `The invitation of ${email} is taken back.`,
      );
      if (kind === 'take') document.getElementById('invitations-list')?.focus();
    } catch (thrown) {
      const title = kind === 'send' ? 'The invitation was not mailed' : 'The invitation stands';
      setError({ title, error: asRequestError(thrown) });
    }
    setBusy(null);
  }

  return (
    <div id="invitations-list" tabIndex={-1} className="outline-none">
      {group.invitations.length ? (
        <DataTable
          label="Open invitations"
          ruled
          phoneColumns="minmax(0,1fr) auto"
          columns={[
            { key: 'email', head: 'Open invitation', phone: { area: '1 / 1' } },
            { key: 'role', head: 'As', phone: { area: '1 / 2', end: true } },
            { key: 'state', head: 'State', phone: { area: '2 / 1 / 3 / 3' } },
            {
              key: 'actions',
              head: <span className="sr-only">Actions</span>,
              phone: { area: '3 / 1 / 4 / 3' },
            },
          ]}
          rows={group.invitations.map((invitation) => ({
            key: invitation.id,
            cells: {
              email: <span className="wrap-anywhere">{invitation.email}</span>,
              role: invitation.role,
              state: (
                <span className="inline-flex flex-wrap items-center gap-x-1">
                  {invitation.sentAt ? (
                    <>
                      <StateWord kind="wait">waits, mailed</StateWord>
                      <Stamp at={invitation.sentAt} />
                    </>
                  ) : (
                    <>
                      <StateWord kind="warn">not mailed, made</StateWord>
                      <Stamp at={invitation.createdAt} />
                    </>
                  )}
                </span>
              ),
              actions: (
                <span className="inline-flex flex-wrap gap-x-2">
                  <WordButton
                    of={`the invitation of ${invitation.email}`}
                    onClick={() => void act('send', invitation)}
                  >
                    {busy?.kind === 'send' && busy.id === invitation.id ? 'Sending …' : 'Send again'}
                  </WordButton>
                  <WordButton
                    id={`take-${invitation.id}`}
                    of={`the invitation of ${invitation.email}`}
                    onClick={() => {
                      setSaid('');
                      setAsked(invitation);
                    }}
                  >
                    Take back
                  </WordButton>
                </span>
              ),
            },
          }))}
        />
      ) : null}
      {asked ? (
        <Asking
          key={asked.id}
          question={`Take back the invitation of ${asked.email}? They are told by mail, and signing in no longer makes them a member.`}
          act="Take it back"
          keep="Let it stand"
          busy={busy?.kind === 'take' ? 'Taking it back …' : undefined}
          onAct={() => void act('take', asked)}
          onKeep={() => {
            document.getElementById(`take-${asked.id}`)?.focus();
            setAsked(null);
          }}
        />
      ) : null}
      {error ? <RequestMessage error={error.error} title={error.title} /> : null}
      <p role="status" className="mb-1 font-controls text-note text-ink-2">
        {said}
      </p>
    </div>
  );
}

/** For leads: who is asked to join and hasn't answered, and asking others. An invitation holds until it is taken back. */
export function Invitations({ group, permissions, onChanged }: Props) {
  return (
    <div className="border-t border-ink pt-2">
      <p className="text-small text-ink-2">
        {group.invitations.length
          ? 'An invitation holds until it is answered by signing in, or taken back. Inviting the same address again changes its role.'
          : 'No invitation is open. One that is holds until it is answered by signing in, or taken back.'}
      </p>
      <OpenInvitations group={group} onChanged={onChanged} />
      <InviteForm group={group} permissions={permissions} onChanged={onChanged} />
    </div>
  );
}
