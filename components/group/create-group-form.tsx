'use client';

import { useRouter } from 'next/navigation';
import { NameForm } from '@/components/api/name-form';
import { send } from '@/components/api/request';

/** Creates a group and goes to it; its creator leads it. */
export function CreateGroupForm({ primary = false }: { primary?: boolean }) {
  const router = useRouter();
  return (
    <NameForm
      label="Name of the group"
      help="You lead it; you can invite others once it is there."
      act="Create the group"
      primary={primary}
      refused="No group was created"
      onName={async (name) => {
        const { id } = await send<{ id: string }>('POST', '/api/v1/groups', { name });
        router.push(`/groups/${id}`);
      }}
    />
  );
}
