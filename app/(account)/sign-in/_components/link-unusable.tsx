import { PageChrome } from '@/components/account/page-chrome';
import { BeatFigure } from '@/components/figures/beat-figure';
import { Button, Buttons } from '@/components/ui/button';
import { SignInSheet } from '@/components/ui/sign-in-sheet';
import { linkLifetime } from '@/lib/auth/config';
import { version } from '@/lib/http/page-data';
import { lifetimeInWords } from './lifetime';

/** A used, expired or cut link: nothing is wrong with the account, a new one is a press away. */
export function LinkUnusable() {
  return (
    <PageChrome version={version}>
      <SignInSheet title="This link can’t be used any more" figure={<BeatFigure />}>
        <div className="border-t border-ink pt-2">
          <p>
            A link signs you in once, {lifetimeInWords(linkLifetime)}. This one was used already, is older
            than that, or was cut short on its way. Your account is as it was.
          </p>
          <Buttons>
            <Button kind="primary" href="/sign-in">
              Mail me a new link
            </Button>
          </Buttons>
        </div>
      </SignInSheet>
    </PageChrome>
  );
}
