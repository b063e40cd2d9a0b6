import { Button } from '@/components/ui/button';
import { EmptyState } from '@/components/ui/empty-state';
import { IndexSection } from '@/components/ui/index-list';
import { Stamp } from '@/components/ui/num';
import { DataTable } from '@/components/ui/table';
import { capital, counted } from '@/components/words/counts';
import type { Group } from '@/lib/schemas';

/** On the group's home: who belongs to it; what can be changed stands on the page of members. */
export function Members({ group }: { group: Group }) {
  const { id, members, invitations, may } = group;
  const invites = may.includes('group.invite');
  return (
    <IndexSection
      id="members"
      title="Members"
      action={<Button href={`/groups/${id}/members`}>{invites ? 'Invite and change' : 'All of them'}</Button>}
    >
      {members.length === 1 ? (
        <EmptyState>Only you. An approval needs a referee who isn’t the analyst of the notebook.</EmptyState>
      ) : (
        <DataTable
          label="Members and their roles"
          columns={[
            { key: 'email', head: 'Member' },
            { key: 'role', head: 'Role' },
            { key: 'since', head: 'Since', phone: 'drop' },
          ]}
          rows={members.map(({ email, role, since }) => ({
            key: email,
            cells: {
              email: <span className="wrap-anywhere">{email}</span>,
              role,
              since: <Stamp at={since} />,
            },
          }))}
        />
      )}
      {invitations.length ? (
        <p className="text-small text-ink-2">{capital(counted(invitations.length, 'invitation'))} open.</p>
      ) : null}
    </IndexSection>
  );
}
