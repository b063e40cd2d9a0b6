import type { Diagnostic, Mode } from '@/lib/schemas';
import { judgeModes, modeTable, type ModeRow, type ModeScan } from '@/lib/inference/scan';
import { diagnose, judgeGate, type Diagnosis, type GateTarget } from '@/lib/sampler';
import type { FitColumns } from './fit-model';
import { seenEnd, toldEnd } from './fit-expectation';
import { judgedFrom, storedOf, strideOf } from './fit-schedule';
import type { StoredReport } from '@/lib/schemas/stored-report';

/** Entries of the history that are kept; beyond, every second one goes. */
const longestHistory = 60;

const orNull = (value: number): number | null => (Number.isFinite(value) ? value : null);

function present(parameter: string, derived: boolean, found: Diagnosis): Diagnostic {
  return {
    parameter,
    derived,
    mean: orNull(found.mean),
    sd: orNull(found.sd),
    q2_5: orNull(found.q2_5),
    q16: orNull(found.q16),
    q50: orNull(found.q50),
    q84: orNull(found.q84),
    q97_5: orNull(found.q97_5),
    rhat: orNull(found.rhat),
    essBulk: orNull(found.essBulk),
    essTail: orNull(found.essTail),
    mcseMean: orNull(found.mcseMean),
    mcseSd: orNull(found.mcseSd),
  };
}

/** The kept draws of one fit in memory, appended block by block and read at every look. */
export class KeptDraws {
  private readonly blocks: { firstKept: number; stride: number; values: Float64Array }[][];

  constructor(
    private readonly columns: FitColumns,
    private readonly warmup: number,
    replicas: number,
  ) {
    this.blocks = Array.from({ length: replicas }, () => []);
  }

  get replicas(): number {
    return this.blocks.length;
  }

  /** Adds stored rows: row i is recorded draw `first + i × stride`. Draws of warm-up are passed over. */
  append(replica: number, first: number, stride: number, values: Float64Array): void {
    if (first >= this.warmup) this.blocks[replica].push({ firstKept: first - this.warmup, stride, values });
  }

  /** Every reported quantity's draws, one array a replica, as they are served when `kept` draws have been made. */
  chains(kept: number): Map<string, Float64Array[]> {
    const { sampled, derived } = this.columns;
    const names = [...sampled, ...derived];
    const result = new Map(names.map((name) => [name, [] as Float64Array[]]));
    const computed = new Float64Array(derived.length);
    for (let replica = 0; replica < this.blocks.length; replica++) {
      const chains = names.map(() => new Float64Array(storedOf(kept)));
      this.visit(replica, kept, (values, offset, at) => {
        for (let i = 0; i < sampled.length; i++) chains[i][at] = values[offset + 2 + i];
        this.columns.derive(values, offset, computed);
        for (let i = 0; i < derived.length; i++) chains[sampled.length + i][at] = computed[i];
      });
      names.forEach((name, i) => result.get(name)?.push(chains[i]));
    }
    return result;
  }

  /** ln likelihood of the same draws, one array a replica. */
  logLikelihood(kept: number): Float64Array[] {
    return this.blocks.map((_, replica) => {
      const chain = new Float64Array(storedOf(kept));
      this.visit(replica, kept, (values, offset, at) => (chain[at] = values[offset]));
      return chain;
    });
  }

  /** Shows every served draw of a replica: the stored values that hold it, where it begins, and which it is. */
  private visit(
    replica: number,
    kept: number,
    show: (values: Float64Array, offset: number, at: number) => void,
  ): void {
    const { width } = this.columns;
    const stride = strideOf(kept);
    let at = 0;
    for (const block of this.blocks[replica]) {
      const rows = block.values.length / width;
      for (let row = 0; row < rows; row++) {
        const draw = block.firstKept + row * block.stride;
        if (draw >= kept || draw % stride !== 0) continue;
        show(block.values, row * width, at);
        at++;
      }
    }
    if (at !== storedOf(kept))
      throw new Error(`A replica has ${at} stored draws where ${storedOf(kept)} are due.`);
  }
}

function decimate(history: StoredReport['history']): StoredReport['history'] {
  if (history.length <= longestHistory) return history;
  const last = history.length - 1;
  return history.filter((_, i) => (last - i) % 2 === 0);
}

const presentMode = ({ mu, lo, hi, weight, mcse, scanWeight }: ModeRow): Mode => ({
  mu,
  lo,
  hi,
  weight: orNull(weight),
  mcse: orNull(mcse),
  scanWeight: orNull(scanWeight),
});

export interface Look {
  warmup: number;
  /** Recorded draws a replica, warm-up included. */
  draws: number;
  target: GateTarget;
}

/**
 * Looks at a fit: diagnostics of every sampled parameter and derived quantity over exactly the draws that are served, and
 * the gate, which wants the shares of the modes to be those of the scan or of the independent run too, where there is one. An angle's numbers are of its coordinate in (−π, π]. A derived quantity that is one number throughout (because what
 * it depends on is fixed) is reported but not judged: it is a function of parameters that are judged themselves.
 */
export function lookAt(
  draws: KeptDraws,
  columns: FitColumns,
  look: Look,
  before: StoredReport,
  scanned: ModeScan | null = null,
): StoredReport {
  const kept = Math.max(0, look.draws - look.warmup);
  const chains = draws.chains(kept);
  const found = [...chains].map(([name, each]) => ({ name, diagnosis: diagnose(each) }));
  const derived = new Set(columns.derived);
  const judged = found.filter(({ name, diagnosis }) => !(derived.has(name) && diagnosis.constant));
  const gate = judgeGate(
    {
      chainsByParameter: Object.fromEntries(judged.map(({ name }) => [name, chains.get(name) ?? []])),
      diagnosisByParameter: Object.fromEntries(judged.map(({ name, diagnosis }) => [name, diagnosis])),
    },
    look.target,
    judgedFrom,
  );
  const table =
    scanned && kept > 0
      ? modeTable(
          scanned,
          scanned.names.map((name) => chains.get(name) ?? []),
        )
      : [];
  const apart = scanned && kept >= judgedFrom ? judgeModes(scanned, table) : [];
  const entry = {
    draws: kept,
    rhat: found.map(({ diagnosis }) => orNull(diagnosis.rhat)),
    ess: found.map(({ diagnosis }) => orNull(Math.min(diagnosis.essBulk, diagnosis.essTail))),
  };
  const earlier = before.history.filter((past) => past.draws < kept);
  const met = gate.met && apart.length === 0;
  const isJudged = found.map((each) => judged.includes(each));
  const ofJudged = ({ draws: at, rhat, ess }: typeof entry) => ({
    draws: at,
    rhat: rhat.filter((_, k) => isJudged[k]),
    ess: ess.filter((_, k) => isJudged[k]),
  });
  const end = met ? null : seenEnd([...earlier, entry].map(ofJudged), look.target, draws.replicas);
  return {
    draws: look.draws,
    diagnostics: found.map(({ name, diagnosis }) => present(name, derived.has(name), diagnosis)),
    history: kept > 0 ? decimate([...earlier, entry]) : [],
    gate: { met, reasons: [...gate.reasons, ...apart] },
    wanted: met ? kept : end && toldEnd(end, kept),
    estimate: end && end.estimate,
    acceptance: before.acceptance,
    ladder: before.ladder,
    logEvidence: before.logEvidence,
    noEvidence: before.noEvidence,
    modes: table.map(presentMode),
    modesOf: scanned && { by: scanned.by, names: [...scanned.names] },
    widths: null,
  };
}
