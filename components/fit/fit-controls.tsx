'use client';

import { useState } from 'react';
import { asRequestError, detailAt, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { NumberField } from '@/components/ui/number-field';
import { capital, duration } from '@/components/words/counts';
import { formatCount } from '@/lib/figures/format';
import type { Fit } from '@/lib/schemas';
import { isRunning } from './fit-words';

type Verb = 'stop' | 'resume' | 'extend';

const refusals: Record<Verb, string> = {
  stop: 'The fit was not stopped',
  resume: 'The fit was not resumed',
  extend: 'The fit was not extended',
};

/** What further draws cost: their number over all replicas, and the time at the rate that the fit went at. */
function cost(fit: Fit, draws: number): string {
  const all = draws * fit.replicas;
  const count = `${formatCount(all)} draws in all`;
  const rate = fit.drawsPerSecond;
  return rate !== null && rate > 0 ? `${count}, up to ${duration(all / rate)} at the rate so far` : count;
}

/** What pressing the buttons that are there comes to. */
function note(fit: Fit, may: (verb: Verb) => boolean): string | undefined {
  const running = isRunning(fit.status);
  if (running && may('stop')) {
    return fit.status === 'queued'
      ? 'It keeps its place when this page is closed.'
      : 'Sampling goes on when this page is closed. Stopping takes effect at the end of a block and can be taken back by Resume.';
  }
  if (running) return may('resume') ? 'It is about to stop; Resume lets it go on.' : undefined;
  if (may('resume')) return 'Resume goes on from the last draw, with the very draws of a run in one go.';
  if (fit.status === 'converged')
    return 'The target is met: an extended fit goes on to the end of the draws added.';
  return undefined;
}

/** Stop and keep, Resume, Extend: as far as the fit's state and the person's role allow. */
export function FitControls({ fit, onFit }: { fit: Fit; onFit: (fit: Fit) => void }) {
  const [error, setError] = useState<{ verb: Verb; said: RequestError } | null>(null);
  const [extending, setExtending] = useState(false);
  const [more, setMore] = useState<number | null>(fit.progress.maxDraws);
  const may = (verb: Verb) => fit.may.includes(`fit.${verb}`);
  const running = isRunning(fit.status);

  async function ask(verb: Verb, body?: unknown) {
    setError(null);
    try {
      onFit(await send<Fit>('POST', `/api/v1/fits/${fit.id}/${verb}`, body));
      setExtending(false);
    } catch (thrown) {
      setError({ verb, said: asRequestError(thrown) });
    }
  }

  if (!may('stop') && !may('resume') && !may('extend')) return null;
  return (
    <>
      <Buttons note={note(fit, may)}>
        {running && may('stop') ? <Button onClick={() => void ask('stop')}>Stop and keep</Button> : null}
        {may('resume') ? <Button onClick={() => void ask('resume')}>Resume</Button> : null}
        {may('extend') ? (
          <Button aria-expanded={extending} onClick={() => setExtending(!extending)}>
            Extend
          </Button>
        ) : null}
      </Buttons>
      {extending && may('extend') ? (
        <form
          noValidate
          className="max-w-[324px]"
          onSubmit={(event) => {
            event.preventDefault();
            if (more !== null) void ask('extend', { draws: more });
          }}
        >
          <NumberField
            integer
            decimals={0}
            label="Draws to add, a replica"
            name="draws"
            value={more}
            onValue={setMore}
            error={detailAt(error?.said ?? null, 'draws')}
            help={`Beyond those that are ${running ? 'allowed now' : 'there'}.${more === null ? '' : ` ${capital(cost(fit, more))}.`}`}
          />
          <Buttons>
            <Button type="submit" reason={more === null ? 'Give a number first.' : undefined}>
              Add them
            </Button>
          </Buttons>
        </form>
      ) : null}
      <RequestMessage
        error={error?.said ?? null}
        title={error ? refusals[error.verb] : ''}
        shown={['draws']}
      />
    </>
  );
}
