'use client';

import { useRetries } from '@/components/account/use-retries';
import { Button, Buttons } from '@/components/ui/button';
import { BrokenTone } from '@/components/ui/motif';
import { Message } from '@/components/ui/message';
import { RunningHead } from '@/components/ui/running-head';
import { PageHead } from '@/components/ui/section';
import { Sheet } from '@/components/ui/sheet';
import { counted } from '@/components/words/counts';

const causes = {
  server: 'The server can’t be reached',
  database: 'The database is away',
  unknown: 'The fault is on our side',
} as const;

/** A fault of ours: what is kept, what can be done, and when the page tries by itself to be drawn again. */
export default function PageError({
  error,
  retry,
}: {
  error: Error & { digest?: string };
  /** Asks the server for the page again. */
  retry: () => void;
}) {
  const { cause, secondsLeft, retryNow } = useRetries(retry);
  return (
    <>
      <RunningHead home="/" />
      <Sheet>
        <PageHead title="This page could not be drawn">
          <BrokenTone at={0.6} />
          <Message level="error" title={causes[cause]}>
            <p>
              What is stored is kept, and fits go on sampling. The page is drawn by itself when that is
              possible again.
              {cause === 'unknown' && error.digest
                ? ` If this stays, tell the site administrator: it is logged under ${error.digest}.`
                : ''}
            </p>
          </Message>
          <p className="font-controls text-note text-ink-2">
            {secondsLeft === null ? 'Trying …' : `The next try is in ${counted(secondsLeft, 'second')}.`}
          </p>
          <Buttons>
            <Button kind="primary" onClick={retryNow}>
              Draw it again
            </Button>
            <Button href="/?groups">To your groups</Button>
          </Buttons>
        </PageHead>
      </Sheet>
    </>
  );
}
