import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { SignInForm } from '@/components/account/sign-in-form';
import { BeatFigure } from '@/components/figures/beat-figure';
import { SignInSheet } from '@/components/ui/sign-in-sheet';
import { linkLifetime } from '@/lib/auth/config';
import { version } from '@/lib/http/page-data';
import { returnPath } from '@/lib/http/return-path';
import { lifetimeInWords } from './_components/lifetime';

export const metadata: Metadata = { title: 'Sign in' };

const remedies: Record<string, string> = {
  EmailInvalid: 'Give an address of the form name@institute.example.',
  TooMany: 'Several links were mailed to this address just now. Use the newest, or wait some minutes.',
};

export default async function SignInPage({
  searchParams,
}: {
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}) {
  const { error, callbackUrl } = await searchParams;
  return (
    <PageChrome version={version}>
      <SignInSheet
        title="A shared logbook for what squeezed triangles say about heavy fields"
        lede="Measurements, templates, chains and the group’s statement are kept together, with the record of who set what and when."
        figure={<BeatFigure />}
      >
        <SignInForm
          callbackUrl={returnPath(callbackUrl)}
          lifetime={lifetimeInWords(linkLifetime)}
          error={
            typeof error === 'string'
              ? (remedies[error] ?? 'The link could not be sent. Try again.')
              : undefined
          }
        />
        <p className="mt-3 font-controls text-note text-ink-2">
          Whoever signs in can open a group. If you were invited to one, use the address to which the
          invitation came.
        </p>
      </SignInSheet>
    </PageChrome>
  );
}
