import { InferenceError, type InferenceSpec } from '@/lib/inference';
import { CHAINS, IndependentRun, scanModes, type ModeScan } from '@/lib/inference/scan';
import type { Snapshot } from '@/lib/schemas';
import { judgedFrom } from './fit-schedule';

/** Draws of the independent run for one recorded draw of warm-up, which a ladder makes dear, and for one kept draw, of all replicas. */
const perWarmupDraw = 0.6;
const perKeptDraw = 0.12;

/** Draws of each chain of the independent run when `kept` draws a replica have been made: a function of counts alone. */
export const independentDraws = (
  { warmup, replicas }: Pick<Snapshot, 'warmup' | 'replicas'>,
  kept: number,
): number => Math.max(100, Math.ceil((replicas * (perWarmupDraw * warmup + perKeptDraw * kept)) / CHAINS));

/**
 * The modes of a fit's posterior as a scan or an independent run has them: a function of the snapshot and of the number of draws. Null
 * before convergence is judged, and where there is nothing to compare: no mass, one of two that is fixed, one without bounds.
 */
export class FitModes {
  private scan: ModeScan | null = null;
  private run: IndependentRun | null = null;
  private looked = false;

  constructor(
    private readonly spec: InferenceSpec,
    private readonly snapshot: Pick<Snapshot, 'seed' | 'warmup' | 'replicas'>,
  ) {}

  /** When `kept` draws a replica have been made. What takes long is made when it is first asked for. */
  at(kept: number): ModeScan | null {
    if (kept < judgedFrom) return null;
    if (!this.looked) this.look();
    return this.run ? this.run.modesAt(independentDraws(this.snapshot, kept)) : this.scan;
  }

  private look(): void {
    const { spec, snapshot } = this;
    this.looked = true;
    try {
      this.run = IndependentRun.of(spec, snapshot.seed);
      if (!this.run) this.scan = scanModes(spec, snapshot.seed);
    } catch (error) {
      // What can't be scanned can be fitted all the same.
      if (!(error instanceof InferenceError)) throw error;
    }
  }
}
