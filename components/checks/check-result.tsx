'use client';

import { useMemo } from 'react';
import { RankDifferences, RankHistograms, type RankPanel } from '@/components/figures/rank-figure';
import { quantitiesOf, quantityOf, type Quantity } from '@/components/fit/quantities';
import { figureNumber, sectionNumber } from '@/components/notebook/sections';
import { Caution } from '@/components/ui/caution';
import { StateWord } from '@/components/ui/state-word';
import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { formatCount, formatNumber, formatPercent } from '@/lib/figures/format';
import { LOG_LIKELIHOOD } from '@/lib/inference/calibration/quantity-name';
import { verdictWords } from '@/lib/inference/calibration/words';
import type { CalibrationResult, NotebookCheck } from '@/lib/schemas';
import { coverageBounds, noiseWords, sightWords, thinningWords } from './result-words';

const likelihoodSymbol = { base: 'ln L', sub: '' };

function panelsOf(
  { quantities }: CalibrationResult,
  named: ReadonlyMap<string, Quantity>,
): readonly RankPanel[] {
  return quantities.map(({ name, bars, counts, shape }) => ({
    name,
    symbol: name === LOG_LIKELIHOOD ? likelihoodSymbol : quantityOf(named, name).symbol,
    bars,
    counts,
    word: shape,
  }));
}

/** How often central intervals held the truth, with what is expected of so many draws. */
function CoverageTable({
  result,
  named,
}: {
  result: CalibrationResult;
  named: ReadonlyMap<string, Quantity>;
}) {
  const { coverage, datasets, draws, alpha } = result;
  const names = [...new Set(coverage.map(({ name }) => name))];
  const levels = coverage.filter(({ name }) => name === names[0]);
  const percent = (share: number) => formatNumber(100 * share, 1);
  const cellOf = (name: string, level: number) => {
    const found = coverage.find((each) => each.name === name && each.level === level);
    if (!found) return null;
    const { held, lower, upper } = found;
    const word = held < lower ? 'low' : held > upper ? 'high' : null;
    return (
      <>
        {percent(held / datasets)}
        {word ? (
          <>
            {' '}
            <StateWord kind="warn">{word}</StateWord>
          </>
        ) : null}
      </>
    );
  };
  return (
    <DataTable
      caption={
        <>
          Truths within central intervals of their posteriors, in % of {formatCount(datasets)} data sets. From{' '}
          {formatCount(draws)} draws an interval of 95 % holds {percent(levels[levels.length - 1].expected)} %
          when all is well, since its ends are drawn too; all shares of the table keep within the last row in{' '}
          {formatPercent(1 - alpha)} of such checks or more.
        </>
      }
      phoneColumns="1fr 1fr"
      columns={[
        { key: 'name', head: 'Parameter', phone: { area: '1 / 1 / 2 / 3' } },
        ...levels.map(({ level }, i) => ({
          key: String(level),
          head: `${formatPercent(level)} interval`,
          numeric: true,
          phone: { area: `${2 + Math.floor(i / 2)} / ${1 + (i % 2)}`, label: formatPercent(level) },
        })),
      ]}
      rows={[
        ...names.map((name) => ({
          key: name,
          cells: {
            name: <Sym {...quantityOf(named, name).symbol} />,
            ...Object.fromEntries(levels.map(({ level }) => [String(level), cellOf(name, level)])),
          },
        })),
        {
          key: 'expected',
          cells: {
            name: 'expected',
            ...Object.fromEntries(levels.map((each) => [String(each.level), percent(each.expected)])),
          },
        },
        {
          key: 'between',
          cells: {
            name: 'from, to',
            ...Object.fromEntries(levels.map((each) => [String(each.level), coverageBounds(each, datasets)])),
          },
        },
      ]}
    />
  );
}

/** What a check found. */
export function CheckResult({ check }: { check: NotebookCheck }) {
  const named = useMemo(() => quantitiesOf(check.request.template), [check]);
  const { result, request, number } = check;
  if (!result) return null;
  const panels = panelsOf(result, named);
  const nameOf = (name: string) => {
    const { base, sub } = quantityOf(named, name).symbol;
    return `${base}${sub}`;
  };
  const draws = `${formatCount(result.draws)} draws`;
  const out = panels.filter(({ word }) => word !== null).length;
  return (
    <>
      <p>
        <StateWord kind={result.calibrated ? 'ok' : 'warn'}>
          {result.calibrated ? 'calibrated' : 'not calibrated'}
        </StateWord>{' '}
        {verdictWords(result, nameOf)}
      </p>
      <p className="text-small text-ink-2">
        {noiseWords(request)} {thinningWords(result, request)}
      </p>
      <RankHistograms
        number={figureNumber('rank-histograms')}
        label={`Histograms of the ranks of ${panels.length} quantities, check ${number}`}
        fileName={`check-${number}-ranks`}
        panels={panels}
        datasets={result.datasets}
        bar={result.bar}
        caption={
          <>
            Rank of the truth among {draws} of its posterior, as a share of the range, in{' '}
            {formatCount(result.datasets)} simulated data sets; ln L is the log-likelihood at the truth.
            Dotted, the count of uniform ranks; shaded, where all bars of all panels stay in{' '}
            {formatPercent(1 - result.alpha)} of such checks.
          </>
        }
      />
      <RankDifferences
        number={figureNumber('rank-differences')}
        label={`Distribution of the ranks less the uniform one, for ${panels.length} quantities, check ${number}`}
        fileName={`check-${number}-distribution`}
        panels={panels}
        datasets={result.datasets}
        band={result.band}
        caption={
          <>
            Share of ranks below each share of the range, less the uniform one. Shaded, the band that all
            panels keep within at once in {formatPercent(1 - result.alpha)} of such checks
            {out ? `; points mark where ${out === 1 ? 'one leaves' : `${out} leave`} it` : ', and do here'}.
          </>
        }
      />
      <CoverageTable result={result} named={named} />
      <Caution>
        <p>
          The data are simulated by the formula that fits them, over the priors of section{' '}
          {sectionNumber('priors')}: a template that describes nature badly, or a covariance that is wrong,
          can’t show here, and calibration over the priors is no promise for one measurement.
        </p>
        <p>{sightWords(result)}</p>
      </Caution>
    </>
  );
}
