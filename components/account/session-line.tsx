'use client';

import { useEffect, useState } from 'react';
import useSWR from 'swr';
import { asRequestError, read } from '@/components/api/request';
import { onSessionEnd } from '@/components/api/session';
import { Message } from '@/components/ui/message';
import { Button, Buttons } from '@/components/ui/button';
import type { Me } from '@/lib/schemas';

export const mePath = '/api/v1/me';

/**
 * Says in one line that the session is over, with the way back to this very place. Looked at when the window gets the
 * focus again and whenever the API answers that nobody is signed in.
 */
export function SessionLine() {
  const { error } = useSWR(mePath, read<Me>);
  const [refused, setRefused] = useState(false);
  useEffect(() => onSessionEnd(() => setRefused(true)), []);
  const ended = refused || (error !== undefined && asRequestError(error).status === 401);
  if (!ended) return null;
  // Only a browser gets here: on the server nothing has ended yet.
  const { pathname, search, hash } = window.location;
  const place = pathname + search + hash;
  return (
    <div className="no-print mx-auto w-full max-w-page px-gutter">
      <Message level="warning" title="Your session has ended">
        <p>
          What is stored is kept. What isn’t saved on this page stays here while it is open; it can’t be saved
          before you have signed in again.
        </p>
        <Buttons>
          <Button kind="primary" href={`/sign-in?callbackUrl=${encodeURIComponent(place)}`}>
            Sign in and come back here
          </Button>
        </Buttons>
      </Message>
    </div>
  );
}
