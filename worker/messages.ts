import type { DatasetRanks } from '@/lib/inference/calibration';
import type { CalibrationResult } from '@/lib/schemas';
import type { FitModel } from '@/lib/services/fit-model';
import type { ReplicaFacts } from '@/lib/services/fit-moves';
import type { Standing } from '@/lib/services/fit-commit';
import type { FinishedScan } from '@/lib/services/scan-model';
import type { StoredReport } from '@/lib/schemas/stored-report';

/** What a thread is started with. */
export interface ReplicaSetup {
  model: FitModel;
  /** Serialised state by replica, for those of this thread that have one. */
  states: Map<number, Uint8Array>;
}

/** Asks for `draws` more recorded draws of one replica. */
export interface Advance {
  kind: 'advance';
  replica: number;
  draws: number;
}

/** One block of one replica and the state at its end. */
export interface Turn {
  kind: 'turn';
  replica: number;
  first: number;
  count: number;
  width: number;
  values: Float64Array;
  state: Uint8Array;
  facts: ReplicaFacts;
  /** Milliseconds that each move took, in their order. */
  milliseconds: Float64Array | null;
}

/** The thread can't go on. `told` is written for the person who started the fit; null where the fault is ours. */
export interface Failure {
  kind: 'failure';
  told: string | null;
  stack: string;
}

export type ReplicaAnswer = Turn | Failure;

export interface ReportSetup {
  model: FitModel;
  target: { rhat: number; ess: number };
}

/** Stored rows that the thread is to remember: row i is recorded draw `first + i × stride`. */
export interface Append {
  kind: 'append';
  replica: number;
  first: number;
  stride: number;
  values: Float64Array;
}

export interface LookRequest {
  kind: 'look';
  draws: number;
  before: StoredReport;
  /** What the replicas' states at these draws say. */
  facts: ReplicaFacts[];
  /** What is asked of the fit, by which the look may end it. */
  standing: Standing;
}

export type ReportQuestion = Append | LookRequest;
export type ReportAnswer = { kind: 'report'; report: StoredReport } | Failure;

/** Asks for one block of a check's data sets, or for what all of them come to. */
export type CheckQuestion = { kind: 'block'; first: number } | { kind: 'result'; found: DatasetRanks[] };

export type CheckAnswer =
  | { kind: 'block'; first: number; found: DatasetRanks[] }
  | { kind: 'result'; result: CalibrationResult }
  | Failure;

/** How far a scan is, what it found, or why it can't. Buffers arrive as plain bytes. */
export type ScanThreadAnswer =
  { kind: 'progress'; fraction: number } | { kind: 'scan'; finished: FinishedScan } | Failure;
