'use client';

import { useState } from 'react';
import { RunFigures, Ruler } from '@/components/ui/run-figures';
import { capital, duration, inWords } from '@/components/words/counts';
import { tellTime, timeInWords } from '@/components/words/time-left';
import { formatCount, formatNumber, noValue } from '@/lib/figures/format';
import type { Fit } from '@/lib/schemas';
import { judged, meetsGate } from './quantities';
import { isRunning } from './fit-words';

/** The moves that stand for the others: the jump, and the walk in all directions at once. */
const toldMoves = [
  { word: 'jumps', is: (move: string) => move.includes('jump') },
  { word: 'walks', is: (move: string) => move === 'random walk' },
];

/** Share of the jumps and of the walks that were accepted: "0.57, 0.21". */
export function acceptanceInWords(acceptance: Fit['acceptance']): { label: string; value: string } {
  const told = toldMoves.flatMap(({ word, is }) => {
    const found = acceptance.find(({ move, rate }) => rate !== null && is(move));
    return found ? [{ word, rate: formatNumber(found.rate ?? NaN, 2) }] : [];
  });
  if (!told.length) return { label: 'acceptance', value: noValue };
  return {
    label: `acceptance, ${told.map(({ word }) => word).join(' and ')}`,
    value: told.map(({ rate }) => rate).join(', '),
  };
}

/** "Five of eight quantities meet the gate: R-hat below 1.01, bulk and tail effective sample size above 400." */
export function gateSentence({
  gate,
  diagnostics,
  progress,
}: Pick<Fit, 'gate' | 'diagnostics' | 'progress'>): string {
  const rule = `R-hat below ${formatNumber(gate.target.rhat, 3).replace(/0$/, '')}, bulk and tail effective sample size above ${formatCount(gate.target.ess)}`;
  const all = judged(diagnostics);
  if (progress.draws === 0 || !all.length) return `No draw is kept yet. The gate: ${rule}.`;
  const met = all.filter((each) => meetsGate(each, gate.target)).length;
  if (met === all.length) return `Every one of ${inWords(all.length)} quantities meets the gate: ${rule}.`;
  return `${capital(met === 0 ? 'none' : inWords(met))} of ${inWords(all.length)} quantities ${met === 1 ? 'meets' : 'meet'} the gate: ${rule}.`;
}

/** Where the fit stands, from 0 to 1. During warm-up it is warm-up's own way. */
export function doneShare({ progress, status }: Pick<Fit, 'progress' | 'status'>): number {
  if (status === 'warming-up' || (isRunning(status) && progress.draws === 0))
    return progress.warmupTotal ? progress.warmup / progress.warmupTotal : 0;
  return progress.fraction;
}

/** Said at tenths and at the end, not at each draw. */
export function announcement(fit: Fit): string {
  if (!isRunning(fit.status)) return '';
  const tenths = Math.floor(doneShare(fit) * 10 + 1e-9);
  const what = fit.progress.draws === 0 ? 'Warm-up' : `Fit ${fit.number}`;
  return tenths === 0 ? '' : `${what}, ${tenths} tenths done.`;
}

/** The time that a running fit still takes, in words that don't jump; by the clock of its commits. */
function useTimeLeft({ id, progress, committedAt, createdAt }: Fit): string {
  const given = progress.secondsLeft;
  const at = Date.parse(committedAt ?? createdAt);
  const [told, setTold] = useState(() => (given === null ? null : tellTime(null, { of: id, given, at })));
  if (given === null) return noValue;
  if (told?.of === id && told.given === given && told.at === at) return timeInWords(told);
  const next = tellTime(told, { of: id, given, at });
  setTold(next);
  return timeInWords(next);
}

/** Time left, draws, rate, acceptance and the ruler. */
export function LiveFigures({ fit }: { fit: Fit }) {
  const { progress, drawsPerSecond, acceptance, status } = fit;
  const running = isRunning(status);
  const warming = running && progress.draws === 0;
  const left = useTimeLeft(fit);
  const width = formatCount(progress.maxDraws).length;
  const drawn = warming
    ? `${formatCount(progress.warmup)} of ${formatCount(progress.warmupTotal)}`
    : `${formatCount(progress.draws).padStart(running ? width : 0, '\u2007')} of ${formatCount(progress.maxDraws)}`;
  const share = doneShare(fit);
  return (
    <>
      <RunFigures
        entries={[
          {
            label: running ? 'time left' : 'time spent',
            value: running ? left : duration(progress.secondsSpent),
          },
          { label: warming ? 'warm-up draws a replica' : 'draws a replica', value: drawn },
          {
            label: 'draws a second',
            value: drawsPerSecond === null ? noValue : formatCount(Math.round(drawsPerSecond)),
          },
          acceptanceInWords(acceptance),
        ]}
      />
      <Ruler
        done={share}
        label={`${warming ? 'Warm-up' : 'Progress'}, ${Math.round(share * 100)} per cent`}
      />
      <p className="text-small text-ink-2">{gateSentence(fit)}</p>
    </>
  );
}
