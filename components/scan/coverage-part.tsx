'use client';

import { useMemo } from 'react';
import { WindowFigure } from '@/components/figures/window-figure';
import type { KeptPoints } from '@/components/notebook/kept-points';
import type { TemplateSettings } from '@/components/notebook/prediction';
import { figureNumber, sectionNumber } from '@/components/notebook/sections';
import { Caution } from '@/components/ui/caution';
import { Num } from '@/components/ui/num';
import { Subheading } from '@/components/ui/section';
import { Sym } from '@/components/ui/sym';
import { capital, counted, plain } from '@/components/words/counts';
import type { ScanRange } from '@/lib/inference/scan/scan-range';
import { coverageOf, isLocked, type Coverage } from './coverage';

const mu = <Sym base="μ" />;

/** What the bins see, where they are blind, and which of what is asked for lies there. */
export function CoverageWords({
  coverage: { facts, bins, alias },
  asked,
  locked,
}: {
  coverage: Coverage;
  asked: readonly [number, number] | null;
  locked: boolean;
}) {
  const { length, resolution, spacing, nyquist } = facts;
  return (
    <>
      <p>
        {capital(counted(bins, 'bin'))} span ln <Sym base="κ" /> by <Num>{plain(length, 3)}</Num>: frequencies
        closer than 2π/{plain(length, 3)} = <Num>{plain(resolution, 3)}</Num> are not told apart, and one
        below that makes less than a turn within the data. Neighbours lie up to <Num>{plain(spacing, 3)}</Num>{' '}
        apart in ln <Sym base="κ" />, so that a frequency above π/{plain(spacing, 3)} ={' '}
        <Num>{plain(nyquist, 3)}</Num> (Nyquist’s) shows again below it: {mu} and{' '}
        <Num>
          {plain(alias, 3)} − {mu}
        </Num>{' '}
        look alike. The average over a bin weakens the upper one of the two and does not remove it.
      </p>
      {nyquist > resolution ? (
        <p>
          In reach are masses from about <Num>{plain(resolution, 2)}</Num> to <Num>{plain(nyquist, 2)}</Num>.{' '}
          {asked ? (
            <>
              The priors ask for <Num>{plain(asked[0], 3)}</Num> to <Num>{plain(asked[1], 3)}</Num>
              {asked[0] >= resolution && asked[1] <= nyquist ? ', all of it within.' : '.'}
            </>
          ) : null}
        </p>
      ) : (
        <p>No mass is in reach of this cut: its bins are too few, or lie too close together.</p>
      )}
      {locked ? (
        <p className="text-small text-ink-2">
          With a locked phase the phase turns with the mass too, and neighbours can be told apart somewhat
          more finely than that.
        </p>
      ) : null}
      {asked && nyquist > resolution && asked[0] < resolution ? (
        <Caution>
          Below {mu} = {plain(resolution, 2)} a field makes less than one turn in these bins. A smooth
          background can take its place, and the other way round.
        </Caution>
      ) : null}
      {asked && asked[1] > nyquist ? (
        <Caution>
          Above {mu} = {plain(nyquist, 2)} each frequency has an alias below. Which of the two it is, the data
          say only by what the average over a bin takes away.
        </Caution>
      ) : null}
    </>
  );
}

/** Resolution, reach and aliases of the kept bins; needs no value of the measurement. */
export function CoveragePart({
  points,
  template,
  range,
}: {
  points: KeptPoints;
  template: TemplateSettings;
  range: ScanRange | null;
}) {
  const coverage = useMemo(() => coverageOf(points, template.options), [points, template]);
  const asked = range && Number.isFinite(range.lo) ? ([range.lo, range.hi] as const) : null;
  return (
    <>
      <Subheading>What these bins can see</Subheading>
      {coverage ? (
        <>
          <CoverageWords coverage={coverage} asked={asked} locked={isLocked(template)} />
          <WindowFigure
            number={figureNumber('window')}
            label="Spectral window of the bins, with the frequencies in reach"
            fileName="spectral-window"
            mu={coverage.window.mu}
            power={coverage.window.power}
            reach={[coverage.facts.resolution, coverage.facts.nyquist]}
            asked={asked}
            alias={coverage.alias}
            caption={
              <>
                Spectral window of the {counted(coverage.bins, 'bin')}
                {points.together ? ' of all measurements together' : ''}
                {coverage.weighted ? ', weighted by their errors' : ', all of one weight'}: how a tone looks{' '}
                {mu} away from its own frequency. Where the window rises again, tones are confused.
              </>
            }
          />
        </>
      ) : (
        <p>
          A window needs at least three bins, and the cut of section {sectionNumber('measurement')} keeps{' '}
          {counted(points.rows.length, 'bin')}.
        </p>
      )}
    </>
  );
}
