import type { Snapshot } from '@/lib/schemas';
import type { SamplerSettings } from '@/lib/sampler';

/**
 * How the sampler goes about a new fit; part of its snapshot, since the draws depend on it. `version` changes with the moves
 * themselves. A fit from before it was written down has none, and goes on with walks and jumps alone.
 */
export const samplerOfNewFits: NonNullable<Snapshot['sampler']> = {
  version: 4,
  walkEvery: 5,
  differential: true,
  ladder: { everyInWarmup: 2, every: 4, everyWhereJumpsDo: 200, maxRungs: 20, rejection: 0.4 },
};

/** The sampler's settings of a frozen snapshot; `blocks` are the template's. */
export function samplerSettings(
  { warmup, sampler }: Pick<Snapshot, 'warmup' | 'sampler'>,
  blocks: readonly (readonly number[])[],
): SamplerSettings {
  if (!sampler) return { warmup, blocks };
  const { walkEvery, differential, ladder } = sampler;
  return { warmup, blocks, walkEvery, differential, ladder };
}
