'use client';

import { Button, Buttons } from '@/components/ui/button';
import { BrokenTone } from '@/components/ui/motif';
import { Message } from '@/components/ui/message';
import { RunningHead } from '@/components/ui/running-head';
import { PageHead } from '@/components/ui/section';
import { Sheet } from '@/components/ui/sheet';

/** A fault of ours: what is kept, and what can be done. It asks nothing of the server, which may be what is at fault. */
export default function PageError({
  error,
  reset,
}: {
  error: Error & { digest?: string };
  reset: () => void;
}) {
  return (
    <>
      <RunningHead home="/" />
      <Sheet>
        <PageHead title="This page could not be drawn">
          <BrokenTone at={0.6} />
          <Message level="error" title="The fault is on our side">
            <p>
              What is stored is kept, and fits go on sampling. A service may be away for a moment: drawing the
              page again is worth a try.
              {error.digest
                ? ` If it stays, tell the site administrator: it is logged under ${error.digest}.`
                : ''}
            </p>
          </Message>
          <Buttons>
            <Button kind="primary" onClick={reset}>
              Draw it again
            </Button>
            <Button href="/?groups">To your groups</Button>
          </Buttons>
        </PageHead>
      </Sheet>
    </>
  );
}
