import { PageChrome } from '@/components/account/page-chrome';
import { BeatFigure } from '@/components/figures/beat-figure';
import { SignInSheet } from '@/components/ui/sign-in-sheet';
import { version } from '@/lib/http/page-data';

/** Somebody whom a site administrator has shut out; only the owner of the address gets here. */
export function ShutOut() {
  return (
    <PageChrome version={version}>
      <SignInSheet title="This address may not sign in" figure={<BeatFigure />}>
        <div className="border-t border-ink pt-2">
          <p>
            A site administrator has shut this account out. What you did is kept, and your memberships are as
            they were. Ask the site administrator if you think that this is a mistake.
          </p>
        </div>
      </SignInSheet>
    </PageChrome>
  );
}
