import type { Metadata } from 'next';
import { ConfirmForm } from '@/components/account/confirm-form';
import { PageChrome } from '@/components/account/page-chrome';
import { BeatFigure } from '@/components/figures/beat-figure';
import { SignInSheet } from '@/components/ui/sign-in-sheet';
import { version } from '@/lib/http/page-data';
import { LinkUnusable } from '../_components/link-unusable';

export const metadata: Metadata = { title: 'Sign in', referrer: 'same-origin' };

const text = (value: string | string[] | undefined): string => (typeof value === 'string' ? value : '');

export default async function ConfirmPage({
  searchParams,
}: {
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}) {
  const given = await searchParams;
  const [token, email] = [text(given.token), text(given.email)];
  if (!token || !email) return <LinkUnusable />;
  return (
    <PageChrome version={version}>
      <SignInSheet
        title="Sign in"
        lede={
          <>
            As <span className="wrap-anywhere">{email}</span>
          </>
        }
        figure={<BeatFigure />}
      >
        <div className="border-t border-ink pt-2">
          <p>The link in your mail works once. It is used when you press the button, not before.</p>
          <ConfirmForm token={token} email={email} callbackUrl={text(given.callbackUrl) || '/'} />
        </div>
      </SignInSheet>
    </PageChrome>
  );
}
