'use client';

import { TemplateInWords } from '@/components/notebook/abstract';
import { Caution } from '@/components/ui/caution';
import { Stamp } from '@/components/ui/num';
import { Subheading } from '@/components/ui/section';
import { StateWord } from '@/components/ui/state-word';
import { DataTable } from '@/components/ui/table';
import { plain } from '@/components/words/counts';
import { KappaRange } from '@/components/words/kappa';
import { withoutBins } from '@/components/words/left-out';
import { shortName } from '@/components/words/people';
import { formatCount, formatNumber, noValue } from '@/lib/figures/format';
import type { Trial, Trials } from '@/lib/schemas';
import { isPending, probability, trialWords } from './scan-words';

function Outcome({ trial }: { trial: Trial }) {
  if (isPending(trial)) return <StateWord kind="run">scanning</StateWord>;
  if (trial.status === 'failed') return <StateWord kind="warn">failed</StateWord>;
  return trial.globalP === null ? noValue : probability(trial.globalP);
}

/** Every look for a signal, abandoned ones too; one of the scans is shown above. */
export function TrialLog({
  trials,
  shown,
  onShow,
}: {
  trials: Trials;
  shown: string | null;
  onShow: (id: string) => void;
}) {
  return (
    <>
      <Subheading>Log of looks</Subheading>
      <p>{trialWords(trials)}</p>
      <DataTable
        ruled
        caption="Looks for a signal in this notebook. None is ever removed, whatever it found."
        phoneColumns="1fr auto"
        columns={[
          { key: 'scan', head: 'Scan', phone: { area: '1 / 1' } },
          { key: 'what', head: 'What was looked for', phone: { area: '2 / 1 / 3 / 3' } },
          {
            key: 'range',
            head: 'From, to μ',
            numeric: true,
            phone: { area: '3 / 1 / 4 / 3', label: 'range' },
          },
          { key: 'best', head: 'best μ', numeric: true, phone: { area: '4 / 1 / 5 / 3', label: 'best μ' } },
          { key: 'nulls', head: 'nulls', numeric: true, phone: 'drop' },
          { key: 'p', head: 'global p', numeric: true, phone: { area: '1 / 2', label: 'p', end: true } },
        ]}
        rows={[...trials.trials].reverse().map((trial) => ({
          key: `${trial.scan} ${trial.kind}`,
          cells: {
            scan: (
              <>
                {trial.scan === shown ? (
                  <b className="whitespace-nowrap">Scan {trial.number}, shown</b>
                ) : (
                  <button
                    type="button"
                    className="min-h-target text-action underline decoration-1 underline-offset-[3px]"
                    onClick={() => onShow(trial.scan)}
                  >
                    Show scan {trial.number}
                    <span className="sr-only">{trial.kind === 'two' ? ', of two fields' : ''}</span>
                  </button>
                )}
                <span className="block font-controls text-note whitespace-nowrap text-ink-2">
                  {shortName(trial.by)}, <Stamp at={trial.at} short />
                </span>
              </>
            ),
            what: (
              <>
                {trial.kind === 'two' ? 'Two fields together' : 'One field'};{' '}
                <span className="text-ink-2">
                  <TemplateInWords template={trial.template} />,{' '}
                  <KappaRange lo={trial.cuts.kappaMin} hi={trial.cuts.kappaMax} />,{' '}
                  {trial.cuts.excluded?.length ? `${withoutBins(trial.cuts)}, ` : ''}version{' '}
                  {trial.measurementVersion}
                </span>
              </>
            ),
            range: `${plain(trial.muMin, 3)} to ${plain(trial.muMax, 3)}`,
            best: trial.best ? trial.best.map((mu) => formatNumber(mu, 2)).join(', ') : noValue,
            nulls: formatCount(trial.nulls),
            p: <Outcome trial={trial} />,
          },
        }))}
      />
      {trials.trials.length > 1 ? (
        <Caution>
          Quote the p that counts all looks, not the smallest of them: whoever looks often enough finds
          something.
        </Caution>
      ) : null}
    </>
  );
}
