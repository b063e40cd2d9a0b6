import type { Target } from '@/lib/sampler';
import { advance, startReplica } from '@/lib/sampler';
import type { JumpProposal, MoveCount, SamplerSettings } from '@/lib/sampler';

/** Five normals with unit variances and correlation 0.9^|i − j|; its inverse is tridiagonal. */
export function correlatedNormal(): Target {
  const d = 5;
  const rho = 0.9;
  const innovation = 1 - rho * rho;
  return {
    names: Array.from({ length: d }, (_, i) => `x${i}`),
    periods: new Array<null>(d).fill(null),
    logPrior: () => 0,
    logLikelihood(x) {
      let square = x[0] * x[0];
      for (let i = 1; i < d; i++) square += (x[i] - rho * x[i - 1]) ** 2 / innovation;
      return -square / 2;
    },
    drawPrior(rng, out) {
      for (let i = 0; i < d; i++) out[i] = 30 * rng.normal();
    },
  };
}

/** A half-normal and an exponential, both ending sharply at 0. */
export function truncatedPair(): Target {
  return {
    names: ['h', 'e'],
    periods: [null, null],
    logPrior: (x) => (x[0] >= 0 && x[1] >= 0 ? -x[1] : -Infinity),
    logLikelihood: (x) => (-x[0] * x[0]) / 2,
    drawPrior(rng, out) {
      out[0] = 10 * rng.uniform();
      out[1] = -Math.log(rng.uniform());
    },
  };
}

/** A von Mises density (concentration 2) on a circle of circumference 2π, centred where the coordinate is cut. */
export function phaseAtTheCut(): Target {
  return {
    names: ['phi'],
    periods: [2 * Math.PI],
    logPrior: () => 0,
    logLikelihood: (x) => 2 * Math.cos(x[0] - Math.PI),
    drawPrior(rng, out) {
      out[0] = Math.PI * (2 * rng.uniform() - 1);
    },
  };
}

export interface Run {
  /** Draws after warm-up by parameter and replica: columns[parameter][replica]. */
  columns: Float64Array[][];
  moves: MoveCount[][];
}

/** Runs the replicas to `kept` draws after warm-up and sorts the draws by parameter. */
export function run(
  target: Target,
  jumps: readonly JumpProposal[],
  settings: SamplerSettings,
  seed: string,
  kept: number,
  replicas = 4,
): Run {
  const moves: MoveCount[][] = [];
  const blocks = Array.from({ length: replicas }, (_, replica) => {
    const start = startReplica(target, jumps, settings, seed, replica);
    const warm = advance(target, jumps, settings, start, settings.warmup).state;
    const { state, block } = advance(target, jumps, settings, warm, kept);
    moves.push(state.moves);
    return block;
  });
  const columns = target.names.map((_, k) =>
    blocks.map((block) =>
      Float64Array.from({ length: block.count }, (__, row) => block.values[row * block.width + 2 + k]),
    ),
  );
  return { columns, moves };
}
