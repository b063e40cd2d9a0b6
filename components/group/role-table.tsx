import { Sign } from '@/components/ui/state-word';
import { DataTable } from '@/components/ui/table';
import { roles } from '@/lib/schemas';
import type { Permission } from './role-words';

/** What each role may do, one row a thing: the rules themselves, in words. */
export function RoleTable({ permissions }: { permissions: readonly Permission[] }) {
  return (
    <DataTable
      label="What each role may do"
      columns={[
        { key: 'words', head: 'May' },
        ...roles.map((role) => ({ key: role, head: role, middle: true })),
      ]}
      rows={permissions.map(({ words, roles: allowed }) => ({
        key: words,
        cells: {
          words,
          ...Object.fromEntries(
            roles.map((role) => [
              role,
              allowed.includes(role) ? (
                <>
                  <Sign kind="ok" />
                  <span className="sr-only">yes</span>
                </>
              ) : (
                <>
                  <span aria-hidden="true">–</span>
                  <span className="sr-only">no</span>
                </>
              ),
            ]),
          ),
        },
      }))}
    />
  );
}
