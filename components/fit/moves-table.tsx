import type { ReactNode } from 'react';
import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { inWords } from '@/components/words/counts';
import { decimalsByMcse, formatCount, formatNumber, formatPercent, noValue } from '@/lib/figures/format';
import type { Fit } from '@/lib/schemas';
import { quantityOf, type Quantity } from './quantities';

const blockWalk = 'random walk of ';

const moveWords: Readonly<Record<string, string>> = {
  'spectral-jump': 'jump between modes',
  'random walk': 'walk over all parameters',
  'differential evolution': 'differential evolution from the own past',
  swaps: 'swaps between temperatures',
  'jumps on the ladder': 'jumps at higher temperatures',
  'walks on the ladder': 'walks at higher temperatures',
};

/** The ladder's own jumps and walks: their time is counted with the swaps. */
const withSwaps = new Set(['jumps on the ladder', 'walks on the ladder']);

function moveName(move: string, quantities: ReadonlyMap<string, Quantity>): ReactNode {
  if (!move.startsWith(blockWalk)) return moveWords[move] ?? move;
  return (
    <>
      walk over{' '}
      {move
        .slice(blockWalk.length)
        .split(', ')
        .map((name, i) => (
          <span key={name}>
            {i > 0 ? ', ' : ''}
            <Sym {...quantityOf(quantities, name).symbol} />
          </span>
        ))}
    </>
  );
}

function timeText(move: string, share: number | null): string {
  if (withSwaps.has(move)) return 'with swaps';
  return share === null ? noValue : formatPercent(share);
}

/** "The ladder has 14 temperatures; points went down it and back three times. …" */
export function ladderSentence(ladder: Fit['ladder']): string | null {
  if (!ladder) return null;
  const trips = ladder.roundTrips === 1 ? 'once' : `${inWords(ladder.roundTrips)} times`;
  const ways =
    ladder.roundTrips === 0
      ? 'no point has yet gone down to the prior and back'
      : `points went down to the prior and back ${trips}`;
  const rest = ladder.rests
    ? ' It is advanced seldom, since the jumps move the chains and give the evidence.'
    : '';
  return `The ladder has ${formatCount(ladder.rungs)} temperatures; ${ways}.${rest}`;
}

/** "ln evidence 77.094 ± 0.002, 123 degrees of freedom", or why there is no value. */
export function evidenceSentence({
  logEvidence,
  noEvidence,
}: Pick<Fit, 'logEvidence' | 'noEvidence'>): string {
  if (!logEvidence) return `ln evidence: no value, because ${noEvidence ?? 'this fit kept no sums for it'}.`;
  const { value, error, dof } = logEvidence;
  if (error < 1e-6) return `ln evidence ${formatNumber(value, 4)}, exact: nothing had to be sampled for it.`;
  const decimals = Math.min(4, Math.max(0, decimalsByMcse(error)));
  return `ln evidence ${formatNumber(value, decimals)} ± ${formatNumber(error, decimals + 1)} (standard error, ${formatCount(dof)} degrees of freedom).`;
}

/** How each move of the sampler fares, and what comes of the ladder. */
export function MovesTable({ fit, quantities }: { fit: Fit; quantities: ReadonlyMap<string, Quantity> }) {
  const ladder = ladderSentence(fit.ladder);
  return (
    <>
      <DataTable
        label={`Moves of fit ${fit.number}`}
        columns={[
          { key: 'move', head: 'Move' },
          { key: 'accepted', head: 'accepted', numeric: true },
          { key: 'time', head: 'share of time', numeric: true },
        ]}
        rows={fit.acceptance.map(({ move, rate, share }) => ({
          key: move,
          cells: {
            move: moveName(move, quantities),
            accepted: rate === null ? noValue : formatNumber(rate, 2),
            time: timeText(move, share),
          },
        }))}
      />
      {ladder ? <p className="text-small text-ink-2">{ladder}</p> : null}
      <p>{evidenceSentence(fit)}</p>
    </>
  );
}
