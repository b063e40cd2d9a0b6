import type { ReactNode } from 'react';
import { Footer } from '@/components/ui/footer';
import { RunningHead } from '@/components/ui/running-head';
import { SignOut } from './sign-out';

export interface PageChromeProps {
  version: string;
  /** The signed-in person's address; left out, nobody is signed in. */
  email?: string;
  role?: string;
  /** Name of the group, or what the page is. */
  where?: ReactNode;
  /** Given: the group's own links stand in the running head. */
  groupId?: string;
  current?: 'notebooks' | 'measurements';
  children: ReactNode;
}

/** Running head and footer round a page. */
export function PageChrome({ version, email, role, where, groupId, current, children }: PageChromeProps) {
  const places = [
    { href: `/groups/${groupId}#notebooks`, label: 'Notebooks', current: current === 'notebooks' },
    { href: `/groups/${groupId}#measurements`, label: 'Measurements', current: current === 'measurements' },
  ];
  // Readers see what is released, and measurements aren't.
  const links = groupId ? (role === 'reader' ? places.slice(0, 1) : places) : undefined;
  return (
    <div className="flex min-h-screen flex-col">
      <RunningHead
        home="/"
        where={where}
        links={links}
        who={email ? <SignOut email={email} role={role} /> : undefined}
      />
      <div className="flex-1">{children}</div>
      <Footer version={version} />
    </div>
  );
}
