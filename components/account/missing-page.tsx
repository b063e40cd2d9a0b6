'use client';

import { usePathname } from 'next/navigation';
import { Button, Buttons } from '@/components/ui/button';
import { BrokenTone } from '@/components/ui/motif';
import { PageHead } from '@/components/ui/section';
import { Sheet } from '@/components/ui/sheet';

export interface MissingPageProps {
  /** What an address of this form names: "notebook". */
  thing: string;
  /** Who is signed in; null for a guest. */
  email: string | null;
}

/**
 * The same words for what doesn't exist and for what belongs to others, so that neither tells of the other; the way out
 * depends only on who is asking.
 */
export function MissingPage({ thing, email }: MissingPageProps) {
  const path = usePathname();
  return (
    <Sheet>
      <PageHead
        title={`There is no such ${thing} for you here`}
        abstract={
          email === null
            ? `The address may be cut short, the ${thing} may have been moved, or it is for people who are signed in. Nothing was changed.`
            : `The address may be cut short, the ${thing} may have been moved, or you, signed in as ${email}, are not a member of its group or may not read it in your role. Nothing was changed.`
        }
      >
        <BrokenTone at={0.42} />
        {email === null ? (
          <Buttons>
            <Button kind="primary" href={`/sign-in?callbackUrl=${encodeURIComponent(path)}`}>
              Sign in and come back here
            </Button>
          </Buttons>
        ) : (
          <>
            <p>
              If somebody sent you the address, ask them for its group, and a lead of that group to invite
              you.
            </p>
            <Buttons>
              <Button kind="primary" href="/?groups">
                To your groups
              </Button>
            </Buttons>
          </>
        )}
      </PageHead>
    </Sheet>
  );
}
