import type { ReactNode } from 'react';
import { Footer } from '@/components/ui/footer';
import { RunningHead } from '@/components/ui/running-head';
import { GroupMenu } from './group-menu';
import { SessionLine } from './session-line';
import { SignOut } from './sign-out';

export interface PageChromeProps {
  version: string;
  /** The signed-in person's address; left out, nobody is signed in. */
  email?: string;
  role?: string;
  /** Name of the group, or what the page is; whoever is signed in has the menu of their groups there. */
  where?: ReactNode;
  /** Given: the group's own links stand in the running head. */
  groupId?: string;
  current?: 'notebooks' | 'measurements' | 'members' | 'log';
  children: ReactNode;
}

/** Running head and footer round a page. */
export function PageChrome({ version, email, role, where, groupId, current, children }: PageChromeProps) {
  const places = [
    { href: `/groups/${groupId}#notebooks`, label: 'Notebooks', current: current === 'notebooks' },
    { href: `/groups/${groupId}/measurements`, label: 'Measurements', current: current === 'measurements' },
    { href: `/groups/${groupId}/members`, label: 'Members', current: current === 'members' },
  ];
  // Readers see what is released, and measurements aren't.
  const links = groupId
    ? role === 'reader'
      ? places.filter(({ label }) => label !== 'Measurements')
      : places
    : undefined;
  return (
    <div className="flex min-h-screen flex-col">
      <RunningHead
        home="/"
        where={email && where ? <span className="hidden print:inline">{where}</span> : where}
        menu={email ? <GroupMenu groupId={groupId} where={where} /> : undefined}
        links={links}
        who={email ? <SignOut email={email} role={role} /> : undefined}
      />
      {email ? <SessionLine /> : null}
      <div className="flex-1">{children}</div>
      <Footer version={version} />
    </div>
  );
}
