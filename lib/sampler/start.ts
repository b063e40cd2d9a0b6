/** Where a replica starts: points drawn from the prior, and the first sizes of its steps. */
import { sortedQuantile } from './diagnostics/chain-set';
import { SamplerError } from './errors';
import { initLadder, rungsAtFirst } from './ladder';
import { createCandidate, evaluate, wrapAll } from './point';
import type { Point } from './point';
import type { LadderSettings, LadderState, Rng, Target } from './types';

/** Draws from the prior that a start may take before it is given up. */
const START_TRIES = 1000;

/** Draws from the prior from which the first size of the steps is taken. */
const SPREAD_DRAWS = 100;

/** A draw from the prior with finite likelihood; a SamplerError ('no-start') where 1000 tries give none. */
export function drawStart(target: Target, rng: Rng): Point {
  const { x, logPrior, logLikelihood } = createCandidate(target.names.length);
  const point = { x, logPrior, logLikelihood };
  for (let i = 0; i < START_TRIES; i++) {
    target.drawPrior(rng, point.x);
    wrapAll(point.x, target.periods);
    if (evaluate(target, point)) return point;
  }
  throw new SamplerError(
    'no-start',
    `None of ${START_TRIES} draws from the prior has a finite likelihood: check that the priors overlap with what the data allow.`,
  );
}

/** Half the width of the central 68 % of the prior for each parameter: unlike an sd it exists for heavy tails too. */
export function priorSpread(target: Target, rng: Rng): Float64Array {
  const dimension = target.names.length;
  const x = new Float64Array(dimension);
  const columns = target.names.map(() => new Float64Array(SPREAD_DRAWS));
  for (let draw = 0; draw < SPREAD_DRAWS; draw++) {
    target.drawPrior(rng, x);
    for (let i = 0; i < dimension; i++) columns[i][draw] = x[i];
  }
  return Float64Array.from(columns, (column, i) => {
    const period = target.periods[i];
    if (period !== null) return period / Math.sqrt(12);
    column.sort();
    const spread = (sortedQuantile(column, 0.84) - sortedQuantile(column, 0.16)) / 2;
    return spread > 0 && spread < Infinity ? spread : 1;
  });
}

/** A ladder whose every rung starts at a point of its own over the prior. */
export function startLadder(
  target: Target,
  settings: LadderSettings,
  spread: Float64Array,
  rng: Rng,
): LadderState {
  const starts = Array.from({ length: rungsAtFirst(settings) - 1 }, () => drawStart(target, rng));
  const logs = starts.map(({ logLikelihood }) => logLikelihood);
  return initLadder(settings, starts, spread, Math.max(...logs) - Math.min(...logs));
}
