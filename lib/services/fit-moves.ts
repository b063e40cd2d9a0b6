import { evidenceOf, stonesOf, type Evidence, type LogSums, type ReplicaState } from '@/lib/sampler';
import type { StoredReport } from '@/lib/schemas/stored-report';

/** What one replica's state says beside its draws: plain data, for the report. */
export interface ReplicaFacts {
  moves: { name: string; proposed: number; accepted: number }[];
  stones: LogSums | null;
  ladder: { rungs: number; roundTrips: number; rests: boolean } | null;
}

export function factsOf(state: ReplicaState): ReplicaFacts {
  const { ladder, moves } = state;
  return {
    moves: moves.map(({ name, proposed, accepted }) => ({ name, proposed, accepted })),
    stones: stonesOf(state),
    ladder: ladder
      ? {
          rungs: ladder.betas.length,
          roundTrips: ladder.roundTrips,
          rests: state.stones !== undefined,
        }
      : null,
  };
}

/** What the report says of the moves: all replicas together. `milliseconds` are of each move, in their order; null where not timed. */
export function movesInReport(
  replicas: readonly ReplicaFacts[],
  milliseconds: Float64Array | null,
): Pick<StoredReport, 'acceptance' | 'ladder'> {
  const total = milliseconds?.reduce((sum, each) => sum + each, 0) ?? 0;
  const acceptance = replicas[0].moves.map(({ name }, move) => {
    const proposed = replicas.reduce((sum, { moves }) => sum + moves[move].proposed, 0);
    const accepted = replicas.reduce((sum, { moves }) => sum + moves[move].accepted, 0);
    return {
      move: name,
      rate: proposed > 0 ? accepted / proposed : null,
      share: milliseconds && total > 0 ? milliseconds[move] / total : null,
    };
  });
  const ladders = replicas.flatMap(({ ladder }) => ladder ?? []);
  if (ladders.length === 0) return { acceptance, ladder: null };
  return {
    acceptance,
    ladder: {
      rungs: Math.max(...ladders.map(({ rungs }) => rungs)),
      roundTrips: ladders.reduce((sum, { roundTrips }) => sum + roundTrips, 0),
      rests: ladders.every(({ rests }) => rests),
    },
  };
}

/** Rounding of an exact evidence, and degrees of freedom at which Student's t is the normal. */
const EXACT = { error: 1e-8, dof: 1_000_000 };

/** What the report says of the evidence. `exact`: where it needs no sampling. */
export function evidenceInReport(
  replicas: readonly ReplicaFacts[],
  exact: number | null,
): Pick<StoredReport, 'logEvidence' | 'noEvidence'> {
  if (exact !== null) return { logEvidence: { value: exact, ...EXACT }, noEvidence: null };
  const stones = replicas.flatMap((each) => each.stones ?? []);
  if (stones.length < replicas.length || stones.length === 0) {
    return { logEvidence: null, noEvidence: 'the replicas are warming up' };
  }
  const found = evidenceOf(stones);
  if ('because' in found) return { logEvidence: null, noEvidence: found.because };
  const { value, error, dof }: Evidence = found;
  return { logEvidence: { value, error, dof }, noEvidence: null };
}
