'use client';

import { useMemo, useState } from 'react';
import { AccuracyFigure, type AccuracyLine } from '@/components/figures/accuracy-figure';
import { Caution } from '@/components/ui/caution';
import { SelectField } from '@/components/ui/field';
import { Num } from '@/components/ui/num';
import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { capital, counted, inWords, listed, plain } from '@/components/words/counts';
import { formatNumber, formatPercent } from '@/lib/figures/format';
import type { Measurement, Notebook } from '@/lib/schemas';
import type { ParameterDeclaration, Prior } from '@/lib/templates';
import { keepPoints } from './kept-points';
import { powerLabels } from './option-words';
import type { TemplateSettings } from './prediction';
import { figureNumber } from './sections';
import {
  likelyMasses,
  powerCounts,
  powersNeeded,
  shares,
  useTemplateAccuracy,
  type MassAccuracy,
  type TemplateAccuracy,
} from './template-accuracy';

export interface AccuracyPartProps {
  settings: TemplateSettings;
  parameters: readonly ParameterDeclaration[];
  priors: Readonly<Record<string, Prior>>;
  measurement: Measurement;
  cuts: Notebook['cuts'];
  /** Number of bins that are kept. */
  kept: number;
  /** Name of the measurement where the notebook has several: each has a background of its own. */
  of: string | null;
}

/** Share of the amplitude that the recommended background keeps to. */
const aim = shares[0];

const symbolOf = (kind: MassAccuracy['kind']) => <Sym base={kind === 'heavy' ? 'μ' : 'ν'} />;

const inMasses = ({ kind, mass }: MassAccuracy) => (
  <Num>
    {symbolOf(kind)} = {plain(mass, 2)}
  </Num>
);

/** by 0.04 %, by 2.3 %, by 40 %. */
function inPercent(share: number): string {
  if (share < 0.0001) return 'by less than 0.01 %';
  if (share > 1) return 'by more than its whole size';
  return `by ${plain(100 * share, 2)} %`;
}

/** How far in κ the leading template holds on these bins, and how many powers of κ its background needs. */
export function AccuracyPart({
  settings,
  parameters,
  priors,
  measurement,
  cuts,
  kept,
  of,
}: AccuracyPartProps) {
  const masses = useMemo(() => likelyMasses(parameters, priors), [parameters, priors]);
  const wide = useMemo(() => keepPoints(measurement, { ...cuts, kappaMax: undefined }), [measurement, cuts]);
  const accuracy = useTemplateAccuracy(settings, masses, wide, kept);
  return (
    <>
      {of === null ? null : (
        <p className="text-small text-ink-2">
          On the bins of {of} alone; every measurement has a background of its own.
        </p>
      )}
      {accuracy === null ? (
        <p className="min-h-[560px] text-ink-2">Being compared with the exact shape…</p>
      ) : typeof accuracy === 'string' ? (
        <p>It can’t be compared with the exact shape: {accuracy}</p>
      ) : (
        <Compared accuracy={accuracy} settings={settings} />
      )}
    </>
  );
}

function Compared({ accuracy, settings }: { accuracy: TemplateAccuracy; settings: TemplateSettings }) {
  const { masses, kappa, cut } = accuracy;
  const [chosen, setChosen] = useState<number | null>(null);
  const at = Math.min(chosen ?? Math.floor(masses.length / 2), masses.length - 1);
  const shown = masses[at];
  const own = (settings.options.background as number[] | undefined) ?? [];
  const ownCount = own.every((power, i) => power === i + 1) ? own.length : null;
  const lines: AccuracyLine[] = [
    ...powerCounts.map((count, k) => ({
      label: counted(count, 'power'),
      short: inWords(count),
      name: `error_${count}_powers`,
      bias: shown.curves[k],
      own: count === ownCount,
    })),
    ...(ownCount === null || ownCount === 0
      ? [
          {
            label: 'as set',
            short: 'as set',
            name: 'error_as_set',
            bias: shown.curves[powerCounts.length],
            own: true,
          },
        ]
      : []),
  ];
  return (
    <>
      <Recommended accuracy={accuracy} own={own} />
      <AccuracyFigure
        number={figureNumber('accuracy')}
        label="Error of the amplitude by the highest κ kept, for one to four powers of κ as background"
        fileName="template-accuracy"
        kappa={kappa}
        lines={lines}
        cut={cut}
        shares={shares}
        above={
          masses.length > 1 ? (
            <div className="no-print mb-2 max-w-[240px]">
              <SelectField
                label="For a field of"
                value={String(at)}
                onChange={(event) => setChosen(Number(event.target.value))}
                options={masses.map(({ kind, mass }, i) => ({
                  value: String(i),
                  label: `${kind === 'heavy' ? 'μ' : 'ν'} = ${plain(mass, 2)}`,
                }))}
              />
            </div>
          ) : null
        }
        caption={
          <>
            What the leading template leaves in the amplitude of a field of {inMasses(shown)}, when it is
            fitted to the exact shape on these bins, without noise, beside one to four powers of{' '}
            <Sym base="κ" />; the background as set in ink. Hairlines at 1, 5 and 10 %.
          </>
        }
      />
      <ReachTable accuracy={shown} lowest={accuracy.lowest} last={kappa[kappa.length - 1]} own={ownCount} />
    </>
  );
}

/** The fewest powers at each likely mass, and what the background as set leaves. */
function Recommended({ accuracy, own }: { accuracy: TemplateAccuracy; own: readonly number[] }) {
  const { masses, cut } = accuracy;
  const needed = masses.map((each) => powersNeeded(each, aim));
  const worst = masses.reduce((most, each) =>
    (each.atCut.at(-1) ?? 0) > (most.atCut.at(-1) ?? 0) ? each : most,
  );
  const left = worst.atCut.at(-1) ?? NaN;
  const enough = needed.every((count) => count !== null);
  const most = Math.max(...needed.map((count) => count ?? 0));
  const words = masses.map((each, i) => (
    <span key={each.mass}>
      {i === 0 ? '' : i === masses.length - 1 ? ' and ' : ', '}
      {needed[i] === null ? 'more than four' : inWords(needed[i])} at {inMasses(each)}
    </span>
  ));
  return (
    <>
      <p>
        {enough ? (
          <>
            Recommended for bins up to{' '}
            <Num>
              <Sym base="κ" /> = {plain(cut, 3)}
            </Num>
            : {counted(most, 'power')} of <Sym base="κ" /> in the background.
          </>
        ) : (
          <>
            No background of up to four powers holds to{' '}
            <Num>
              <Sym base="κ" /> = {plain(cut, 3)}
            </Num>{' '}
            at every mass that the priors hold likely: cut lower, or take the exact shape.
          </>
        )}{' '}
        To keep the amplitude within {formatPercent(aim)} it needs {words}
        {masses.length > 1 ? ', the lower, middle and upper of those masses' : ''}.
      </p>
      {left > aim ? (
        <Caution>
          With the background as set ({own.length ? listed(own.map((p) => powerLabels[String(p)])) : 'none'})
          the template alone misses the amplitude {inPercent(left)} at {inMasses(worst)}. No{' '}
          <Num>
            <Sym base="χ" />²
          </Num>{' '}
          shows that.
        </Caution>
      ) : Number.isNaN(left) ? (
        <Caution>There are too few bins to tell what the background as set leaves.</Caution>
      ) : null}
    </>
  );
}

/** Reach in κ by number of powers and share. */
function ReachTable({
  accuracy,
  lowest,
  last,
  own,
}: {
  accuracy: MassAccuracy;
  lowest: number;
  last: number;
  own: number | null;
}) {
  const reachIn = (value: number) =>
    Number.isNaN(value) || value <= lowest ? 'none' : value >= last ? 'all bins' : formatNumber(value, 3);
  return (
    <DataTable
      caption={
        <>
          Highest <Sym base="κ" /> to which the amplitude at {inMasses(accuracy)} keeps within a share of
          itself.
        </>
      }
      columns={[
        { key: 'powers', head: 'background' },
        ...shares.map((share) => ({ key: String(share), head: formatPercent(share), numeric: true })),
      ]}
      rows={powerCounts.map((count, k) => ({
        key: String(count),
        cells: {
          powers: `${capital(counted(count, 'power'))}${count === own ? ', as set' : ''}`,
          ...Object.fromEntries(shares.map((share, j) => [String(share), reachIn(accuracy.reach[k][j])])),
        },
      }))}
    />
  );
}
