import { createRng } from '@/lib/sampler';
import type { Axis } from '@/lib/templates';
import { jointCoverage, type CoverageFacts } from '../summary';
import type { InferenceSpec } from '../types';
import { scanGrid, scanLine, type LineScan } from './line-scan';
import { NullDraws, type NullSource } from './null-draws';
import { planeGrid, scanPlane, type PlaneScan } from './plane-scan';
import { buildCollapsedModel, type CollapsedModel } from './scan-model';
import { lineNulls, planeNulls, trialColumns, type NullHeights } from './scan-nulls';
import { localTail, upcrossingTail } from './significance';
import { aliasesOf, spectralWindow, type SpectralWindow } from './spectral-window';

/** Nulls of a plane with a covariance drawn anew each time: its pairs cost too much for more. */
const PLANE_NULLS_WITH_MOCKS = 1_000;

export interface ScanRequest {
  /** The notebook's template with one field. */
  one: InferenceSpec;
  /** The same with two fields, or null where the notebook has one. */
  two: InferenceSpec | null;
  /** Where the values of each measurement are, one after the other: their own bins or points, whatever window lies between. */
  axes: readonly Axis[];
  muMin: number;
  muMax: number;
  /** Number of simulated nulls. */
  nulls: number;
  /** Measurement before cuts, for nulls that scans with other cuts share. */
  source: NullSource;
  /** The nulls' seed: the same for every scan of one measurement. */
  seed: string;
}

export interface PlaneOutcome extends PlaneScan {
  nulls: NullHeights | null;
}

export interface ScanOutcome {
  line: LineScan;
  localP: number | null;
  /** Degrees of freedom that a field adds at one frequency; null where it isn't linear there. */
  freedom: number | null;
  nulls: NullHeights | null;
  globalPUpcrossing: number | null;
  aliases: number[];
  facts: CoverageFacts;
  window: SpectralWindow;
  backgroundLogEvidence: number;
  plane: PlaneOutcome | null;
}

/** How fast the columns turn with μ: ln κ_max/κ_min, and with locked phases the largest |ln κ/4| too. */
export function reachOf(axes: readonly Axis[], locked: boolean): number {
  const { length } = jointCoverage(axes);
  if (!locked) return length;
  const low = Math.min(...axes.map((axis) => (axis.kind === 'bins' ? axis.lo[0] : axis.kappa[0])));
  return Math.max(length, Math.abs(Math.log(low / 4)));
}

/** Middles of bins in ln κ, or the points. */
function placesOf(axis: Axis): Float64Array {
  if (axis.kind === 'points') return axis.kappa.map(Math.log);
  return axis.lo.map((lo, i) => 0.5 * Math.log(lo * axis.hi[i]));
}

/**
 * Whether nulls can be drawn as the data's own scatter: one covariance that is known, or estimated from one set of mocks. Not with several
 * sets of mocks, nor where a known covariance is added to an estimated one: such a scan has Δχ² and evidence, and no p.
 */
function canDrawNulls(spec: InferenceSpec, model: CollapsedModel, { mocks }: NullSource): boolean {
  const { parts, theoryCovariance } = spec.data;
  if (model.blocks.length > 1 || (theoryCovariance && mocks !== null)) return false;
  return parts?.every(({ mockCount }) => mockCount === null) ?? true;
}

/** The whole scan of a notebook, with what it means. `onProgress` hears of 0 to 1. Pure and deterministic. */
export function runScan(
  request: ScanRequest,
  onProgress: (fraction: number) => void = () => undefined,
): ScanOutcome {
  const { one, two, axes, muMin, muMax, source, seed } = request;
  const model = buildCollapsedModel(one);
  const locked = one.template.structure === 'mixed';
  const reach = reachOf(axes, locked);
  // Shares of the time, by what each part costs about.
  const parts = two ? [0.1, 0.4, 0.3, 0.2] : [0.2, 0.8, 0, 0];
  const within = (part: number) => (fraction: number) =>
    onProgress(parts.slice(0, part).reduce((sum, share) => sum + share, 0) + parts[part] * fraction);

  const grid = scanGrid(muMin, muMax, reach);
  const line = scanLine(model, grid, within(0));
  const drawable = canDrawNulls(one, model, source);
  const draws = (): NullDraws => new NullDraws(source, createRng(`${seed}/data`), createRng(`${seed}/mocks`));
  // Each null's own covariance makes every place dear; with the parabola half of the places see the same peaks.
  const places = drawable
    ? trialColumns(model, source.mocks === null ? grid : grid.filter((_, i) => i % 2 === 0))
    : null;
  const nulls =
    places && lineNulls(model, places, { count: request.nulls, draws: draws(), onPart: within(1) });

  const [block] = model.blocks;
  const { freedom } = model.coordinates;
  const chiSquare = { without: model.background().chiSquare[0], with: line.best.fit.chiSquare[0] };
  const localP =
    freedom === null || !drawable
      ? null
      : localTail(block, source.mocks, chiSquare, freedom, block.fixed.length);
  const facts = jointCoverage(axes);
  const logKappa = Float64Array.from(axes.flatMap((axis) => Array.from(placesOf(axis))));
  const weights = Float64Array.from(logKappa, (_, i) => 1 / one.data.covariance[i * logKappa.length + i]);
  return {
    line,
    localP,
    freedom,
    nulls,
    globalPUpcrossing:
      nulls && freedom !== null && source.mocks === null
        ? upcrossingTail(nulls.observed, freedom, nulls.level, nulls.upcrossings)
        : null,
    aliases: aliasesOf(line.best.mu, facts.spacing, muMin, muMax),
    facts,
    window: spectralWindow(logKappa, weights, Math.max(2 * facts.nyquist, muMax)),
    backgroundLogEvidence: model.backgroundEvidence(),
    plane: two && planeOf(request, two, model, line, { reach, within, draws }),
  };
}

function planeOf(
  { muMin, muMax, source, nulls }: ScanRequest,
  two: InferenceSpec,
  single: CollapsedModel,
  line: LineScan,
  how: { reach: number; within: (part: number) => (fraction: number) => void; draws: () => NullDraws },
): PlaneOutcome {
  const pair = buildCollapsedModel(two);
  const grid = planeGrid(muMin, muMax, how.reach);
  const start: [number, number] =
    line.best.mu < 0.5 * (muMin + muMax)
      ? [line.best.mu, line.best.mu + 0.5 * (muMax - line.best.mu)]
      : [muMin + 0.5 * (line.best.mu - muMin), line.best.mu];
  const plane = scanPlane(pair, grid, { starts: [start], onPart: how.within(2) });
  const places = canDrawNulls(two, single, source) ? trialColumns(single, grid) : null;
  const designs = pair.coordinates.profile([grid[0], grid[1]]);
  const fits = designs.length === 1 && places !== null && designs[0].design.count === 2 * places[0].length;
  const count = source.mocks === null ? nulls : Math.min(nulls, PLANE_NULLS_WITH_MOCKS);
  return {
    ...plane,
    nulls:
      places && fits
        ? planeNulls(single, places, designs[0].sameSign, {
            count,
            draws: how.draws(),
            onPart: how.within(3),
          })
        : null,
  };
}
