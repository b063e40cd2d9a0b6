/**
 * Random numbers: Baagøe's Alea (a multiply-with-carry generator, 96 bits of state) from the package seedrandom,
 * read two steps at a time for 53 bits; normals by Marsaglia's polar method (Marsaglia and Bray 1964, SIAM Review 6, 260).
 *
 * Alea rather than the package's default: its whole state is four numbers that restore exactly.
 */
import alea from 'seedrandom/lib/alea.js';
import { SamplerError } from './errors';
import type { Rng, RngState } from './types';

interface AleaState {
  c: number;
  s0: number;
  s1: number;
  s2: number;
}

class AleaRng implements Rng {
  private spare: number | null;
  private readonly generator: ReturnType<typeof alea>;

  constructor(seed: string, state?: RngState) {
    this.generator = alea(seed, { state: state ? (state.generator as AleaState) : true });
    this.spare = state ? state.spare : null;
  }

  uniform(): number {
    let u = this.generator.double();
    while (u === 0) u = this.generator.double();
    return u;
  }

  normal(): number {
    if (this.spare !== null) {
      const z = this.spare;
      this.spare = null;
      return z;
    }
    let x: number;
    let y: number;
    let square: number;
    do {
      x = 2 * this.generator.double() - 1;
      y = 2 * this.generator.double() - 1;
      square = x * x + y * y;
    } while (square >= 1 || square === 0);
    const factor = Math.sqrt((-2 * Math.log(square)) / square);
    this.spare = y * factor;
    return x * factor;
  }

  state(): RngState {
    return { generator: this.generator.state(), spare: this.spare };
  }
}

/** A generator whose whole stream is fixed by `seed` (any string). */
export function createRng(seed: string): Rng {
  return new AleaRng(seed);
}

/** A generator that goes on exactly where `state()` was taken. A state of another kind is a SamplerError. */
export function restoreRng(state: RngState): Rng {
  const held = state.generator as Partial<AleaState> | null;
  const numbers = held ? [held.c, held.s0, held.s1, held.s2] : [];
  if (
    numbers.length !== 4 ||
    !numbers.every((value) => typeof value === 'number' && Number.isFinite(value))
  ) {
    throw new SamplerError(
      'wrong-state',
      'The state of the random generator isn’t one that this version wrote; start the fit anew with the same seed.',
    );
  }
  return new AleaRng('', state);
}

/** The seed of one replica's own stream, derived from the master seed of the fit; replicas count from 0. */
export function replicaSeed(masterSeed: string, replica: number): string {
  return `${masterSeed}/replica/${replica}`;
}
