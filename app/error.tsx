'use client';

import { Button, Buttons } from '@/components/ui/button';
import { BrokenTone } from '@/components/ui/motif';
import { Message } from '@/components/ui/message';
import { PageHead } from '@/components/ui/section';
import { Sheet } from '@/components/ui/sheet';

/** A fault of ours: what is kept, and what can be done. */
export default function PageError({
  error,
  reset,
}: {
  error: Error & { digest?: string };
  reset: () => void;
}) {
  return (
    <Sheet>
      <PageHead title="This page could not be drawn">
        <BrokenTone at={0.6} />
        <Message level="error" title="The fault is on our side">
          <p>
            What is stored is kept, and fits go on sampling.
            {error.digest ? ` It is logged under ${error.digest}.` : ''}
          </p>
        </Message>
        <Buttons>
          <Button kind="primary" onClick={reset}>
            Draw it again
          </Button>
          <Button href="/">To your groups</Button>
        </Buttons>
      </PageHead>
    </Sheet>
  );
}
