'use client';

import { useState } from 'react';
import { asRequestError, detailAt, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Field } from '@/components/ui/field';
import { NumberField } from '@/components/ui/number-field';
import type { StartFit } from '@/lib/schemas';

export interface FitDefaults {
  replicas: number;
  maxDraws: number;
  rhat: number;
  ess: number;
}

/** Settings of the sampler, with defaults that need no change, and Start. */
export function StartForm({
  notebookId,
  number,
  revision,
  defaults,
  primary,
  reason,
  onStarted,
}: {
  notebookId: string;
  /** Number that the fit will have. */
  number: number;
  revision: number;
  defaults: FitDefaults;
  primary: boolean;
  reason?: string;
  onStarted: (id: string) => Promise<unknown> | unknown;
}) {
  const [settings, setSettings] = useState<{ [K in keyof FitDefaults]: number | null }>({ ...defaults });
  const [seed, setSeed] = useState('');
  const [error, setError] = useState<RequestError | null>(null);
  const [starting, setStarting] = useState(false);
  const set = (name: keyof FitDefaults) => (value: number | null) =>
    setSettings({ ...settings, [name]: value });
  const missing = Object.values(settings).some((value) => value === null);

  async function start() {
    setError(null);
    setStarting(true);
    const { replicas, maxDraws, rhat, ess } = settings;
    const body: StartFit = {
      replicas: replicas ?? undefined,
      maxDraws: maxDraws ?? undefined,
      target: { rhat: rhat ?? undefined, ess: ess ?? undefined },
      ...(seed.trim() ? { seed: seed.trim() } : {}),
    };
    try {
      const { id } = await send<{ id: string }>('POST', `/api/v1/notebooks/${notebookId}/fits`, body);
      await onStarted(id);
    } catch (thrown) {
      setError(asRequestError(thrown));
    } finally {
      setStarting(false);
    }
  }

  return (
    <form
      noValidate
      onSubmit={(event) => {
        event.preventDefault();
        if (!reason && !missing && !starting) void start();
      }}
    >
      <div className="grid max-w-figure grid-cols-3 gap-x-4 gap-y-2 max-tablet:grid-cols-1">
        <NumberField
          integer
          label="Replicas"
          name="replicas"
          value={settings.replicas}
          onValue={set('replicas')}
          error={detailAt(error, 'replicas')}
          help="Independent chains, from 2 to 16."
        />
        <NumberField
          integer
          decimals={0}
          label="Draws a replica at most"
          name="maxDraws"
          value={settings.maxDraws}
          onValue={set('maxDraws')}
          error={detailAt(error, 'maxDraws')}
          help="Kept after warm-up."
        />
        <Field
          label="Seed"
          name="seed"
          value={seed}
          maxLength={200}
          autoComplete="off"
          onChange={(event) => setSeed(event.target.value)}
          error={detailAt(error, 'seed')}
          help="Empty: drawn by the server."
        />
        <NumberField
          label="R-hat below"
          name="rhat"
          value={settings.rhat}
          onValue={set('rhat')}
          error={detailAt(error, 'target.rhat')}
          help="Of every quantity."
        />
        <NumberField
          decimals={0}
          label="Effective sample size above"
          name="ess"
          value={settings.ess}
          onValue={set('ess')}
          error={detailAt(error, 'target.ess')}
          help="Bulk and tail, of every quantity."
        />
      </div>
      <Buttons
        note={reason ? undefined : `Freezes revision ${revision}; later changes leave the fit as it is.`}
      >
        <Button
          kind={primary ? 'primary' : 'default'}
          type="submit"
          reason={
            reason ?? (missing ? 'Fill in the numbers first.' : starting ? 'It is being started.' : undefined)
          }
        >
          Start fit {number}
        </Button>
      </Buttons>
      <RequestMessage
        error={error}
        title="The fit was not started"
        shown={['replicas', 'maxDraws', 'seed', 'target.rhat', 'target.ess']}
      />
    </form>
  );
}
