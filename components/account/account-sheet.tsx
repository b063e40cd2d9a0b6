'use client';

import Link from 'next/link';
import { useState } from 'react';
import useSWR from 'swr';
import { NameForm } from '@/components/api/name-form';
import { asRequestError, read, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Asking } from '@/components/ui/asking';
import { EmptyState } from '@/components/ui/empty-state';
import { IndexSection } from '@/components/ui/index-list';
import { PageHead } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { counted } from '@/components/words/counts';
import type { Me, Settings, Token, TokenCreated } from '@/lib/schemas';
import { MailSettings } from './mail-settings';
import { NewToken, type MadeToken } from './new-token';
import { TokenTable } from './token-table';

const path = '/api/v1/me/tokens';

function TokenForm({ onMade }: { onMade: (made: MadeToken) => void }) {
  return (
    <NameForm
      label="Name of a new token"
      help="Say where it will be used, so that you know which one to revoke."
      act="Make the token"
      refused="No token was made"
      onName={async (name) => {
        const { token } = await send<TokenCreated>('POST', path, { name });
        onMade({ name, token });
      }}
    />
  );
}

function Tokens({ initial }: { initial: Token[] }) {
  const { data: tokens = initial, mutate } = useSWR(path, read<Token[]>, { fallbackData: initial });
  const [made, setMade] = useState<MadeToken | null>(null);
  const [asked, setAsked] = useState<Token | null>(null);
  const [error, setError] = useState<RequestError | null>(null);

  async function revoke(token: Token) {
    setAsked(null);
    setError(null);
    try {
      await send('DELETE', `${path}/${token.id}`);
    } catch (thrown) {
      setError(asRequestError(thrown));
    }
    await mutate();
  }

  return (
    <IndexSection id="tokens" title="Personal tokens">
      {tokens.length ? (
        <TokenTable tokens={tokens} onRevoke={setAsked} />
      ) : (
        <EmptyState>
          No token yet. A program that asks the API in your name sends one in place of signing in.
        </EmptyState>
      )}
      {asked ? (
        <Asking
          key={asked.id}
          question={`Revoke the token “${asked.name}”? What uses it is refused at once, and it can’t be brought back.`}
          act="Revoke it"
          keep="Keep it"
          onAct={() => void revoke(asked)}
          onKeep={() => setAsked(null)}
        />
      ) : null}
      <RequestMessage error={error} title="The token was not revoked" />
      {made ? <NewToken key={made.token} made={made} onHide={() => setMade(null)} /> : null}
      <TokenForm
        onMade={(token) => {
          setMade(token);
          void mutate();
        }}
      />
    </IndexSection>
  );
}

/** A person's own page: their tokens, and the way to their groups. */
export function AccountSheet({
  me,
  tokens,
  settings,
  administers,
}: {
  me: Me;
  tokens: Token[];
  settings: Settings;
  /** They administer the site. */
  administers: boolean;
}) {
  return (
    <Sheet>
      <PageHead title="Your account" byline={me.email} />
      <SheetRow>
        <MailSettings initial={settings} />
        <Tokens initial={tokens} />
        <IndexSection id="groups" title="Groups">
          <div className="border-t border-ink pt-2">
            <p>
              You belong to {counted(me.groups.length, 'group')}.{' '}
              <Link href="/?groups">See and create groups</Link>
            </p>
            {administers ? (
              <p>
                You administer this site.{' '}
                <Link href="/administration">Users, queue, workers and storage</Link>
              </p>
            ) : null}
          </div>
        </IndexSection>
      </SheetRow>
    </Sheet>
  );
}
