import { diagnose, type Diagnosis } from '@/lib/sampler/diagnostics';
import { advance, startReplica } from '@/lib/sampler/replica';
import type { Target } from '@/lib/sampler';
import type { Inference } from '@/lib/inference';

/** Draws of every sampled parameter after warm-up, by name, one array a replica. */
export interface Run {
  chains: Record<string, Float64Array[]>;
  /** Share of jumps accepted, a number a replica. */
  jumpAcceptance: number[];
}

/** Four replicas started over the prior, with the jump and the walks over all parameters and over each block. */
export function runReplicas(
  inference: Inference,
  draws: number,
  { seed = 'posterior', warmup = 1000, target = inference.target as Target } = {},
): Run {
  const names = target.names;
  const blocks = inference.blocks.filter((block) => block.length < names.length);
  const settings = { warmup, blocks };
  const chains: Record<string, Float64Array[]> = Object.fromEntries(names.map((name) => [name, []]));
  const jumpAcceptance: number[] = [];
  for (let replica = 0; replica < 4; replica += 1) {
    const start = startReplica(target, inference.jumps, settings, seed, replica);
    const { state, block } = advance(target, inference.jumps, settings, start, warmup + draws);
    names.forEach((name, i) => {
      const chain = new Float64Array(draws);
      for (let k = 0; k < draws; k += 1) chain[k] = block.values[(warmup + k) * block.width + 2 + i];
      chains[name].push(chain);
    });
    jumpAcceptance.push(state.moves[0].accepted / state.moves[0].proposed);
  }
  return { chains, jumpAcceptance };
}

/** Diagnosis of every parameter of a run. */
export function diagnoseAll(run: Run): Record<string, Diagnosis> {
  return Object.fromEntries(Object.entries(run.chains).map(([name, chains]) => [name, diagnose(chains)]));
}

/** The smallest of bulk and tail effective sizes. */
export function worstSize(diagnoses: Record<string, Diagnosis>): number {
  return Math.min(...Object.values(diagnoses).flatMap(({ essBulk, essTail }) => [essBulk, essTail]));
}
