'use client';

import { PlaneFigure } from '@/components/figures/plane-figure';
import { ScanFigure } from '@/components/figures/scan-figure';
import { figureNumber, sectionNumber } from '@/components/notebook/sections';
import { Caution } from '@/components/ui/caution';
import { DefinitionList } from '@/components/ui/definition-list';
import { Num } from '@/components/ui/num';
import { Sym } from '@/components/ui/sym';
import { listed, plain } from '@/components/words/counts';
import { formatCount, formatNumber } from '@/lib/figures/format';
import type { Scan } from '@/lib/schemas';
import { globalWords, localReference, probability, upcrossingWords, verdict } from './scan-words';

const rise = (
  <>
    Δ<i className="sym">χ</i>²
  </>
);

/** Local and global significance of the best frequency, and what they were read off. */
export function Significance({ scan }: { scan: Scan }) {
  const { best, localP, globalP, nulls, request, aliases } = scan;
  if (!best) return null;
  return (
    <>
      <p>
        The best frequency is{' '}
        <Num>
          <Sym base="μ" /> = {formatNumber(best.mu, 3)}
        </Num>
        , where one field lowers χ² by <Num>{formatNumber(best.deltaChi2, 1)}</Num>.{' '}
        {globalP === null ? '' : verdict(globalP, nulls ?? 0)}
      </p>
      <DefinitionList
        entries={[
          {
            term: 'Global',
            text:
              globalP === null
                ? 'Not known: where the fit isn’t linear at one frequency, no nulls are drawn.'
                : `Anywhere from ${plain(request.muMin, 3)} to ${plain(request.muMax, 3)}, ${globalWords(globalP, nulls ?? 0)}`,
          },
          {
            term: 'Local',
            text:
              localP === null
                ? `Not known: there is ${localReference(scan)}.`
                : `At this one frequency, had it been named beforehand, p = ${probability(localP)}, from ${localReference(scan)}.`,
          },
          ...(upcrossingWords(scan) && globalP !== null
            ? [{ term: 'By formula', text: upcrossingWords(scan) }]
            : []),
          {
            term: 'Aliases',
            text: aliases?.length
              ? `A tone there shows again at μ = ${listed(aliases.map((at) => plain(at, 3)))}.`
              : 'None of the best frequency within the range.',
          },
        ]}
      />
      <Caution>
        The local p is not the significance of a find: the frequency was chosen because {rise} is largest
        there. The global p pays for that choice within this scan, and the log below for the scans beside it.
      </Caution>
    </>
  );
}

function Plane({ scan }: { scan: Scan }) {
  const { plane, request } = scan;
  if (!plane) return null;
  const [first, second] = plane.best.mu;
  return (
    <>
      <p>
        Two fields together fit best at{' '}
        <Num>
          <Sym base="μ" sub="1" /> = {formatNumber(first, 3)}
        </Num>{' '}
        and{' '}
        <Num>
          <Sym base="μ" sub="2" /> = {formatNumber(second, 3)}
        </Num>
        , with {rise} = <Num>{formatNumber(plane.best.deltaChi2, 1)}</Num> against the background alone
        {scan.best ? (
          <>
            , <Num>{formatNumber(plane.best.deltaChi2 - scan.best.deltaChi2, 1)}</Num> more than one field
          </>
        ) : null}
        .{' '}
        {plane.globalP === null
          ? 'No nulls are drawn where the fit isn’t linear at a pair of frequencies.'
          : `Anywhere in the plane, ${globalWords(plane.globalP, plane.nulls)}`}
      </p>
      <PlaneFigure
        number={figureNumber('plane')}
        label={`Rise of χ² over pairs of frequencies, scan ${scan.number}`}
        fileName={`scan-${scan.number}-plane`}
        mu={plane.mu}
        deltaChi2={plane.deltaChi2}
        logEvidence={plane.logEvidence}
        best={plane.best}
        caption={
          <>
            {rise} of two fields against the background alone, over pairs from {plain(request.muMin, 3)} to{' '}
            {plain(request.muMax, 3)}; the cross marks the best pair. The half below the diagonal would repeat
            it.
          </>
        }
      />
    </>
  );
}

/** What a scan found; room is kept while it is being read. */
export function ScanResultPart({ scan, two }: { scan: Scan | null; two: boolean }) {
  if (!scan?.best || !scan.mu || !scan.deltaChi2 || !scan.logEvidence)
    return <div aria-busy="true" className={two ? 'min-h-[1470px]' : 'min-h-[840px]'} />;
  const thresholds = scan.thresholds ?? [];
  return (
    <>
      <Significance scan={scan} />
      <ScanFigure
        number={figureNumber('scan')}
        label={`Rise of χ² and evidence against frequency, scan ${scan.number}`}
        fileName={`scan-${scan.number}`}
        mu={scan.mu}
        deltaChi2={scan.deltaChi2}
        logEvidence={scan.logEvidence}
        background={scan.backgroundLogEvidence}
        best={scan.best}
        aliases={scan.aliases ?? []}
        thresholds={thresholds}
        caption={
          <>
            Scan {scan.number}: by how much one field of frequency <Sym base="μ" /> lowers χ² against the
            background alone, at {formatCount(scan.mu.length)} frequencies
            {thresholds.length ? '; dashed, what nulls reach anywhere in the range' : ''}. The evidence
            averages over the priors of the amplitudes.
          </>
        }
      />
      <Plane scan={scan} />
      <p className="font-controls text-note text-ink-2">
        The best point can be laid under the sliders:{' '}
        <a href="#template" className="text-action underline decoration-1 underline-offset-[3px]">
          section {sectionNumber('template')}, “Best of scan {scan.number}”
        </a>
        .
      </p>
    </>
  );
}
