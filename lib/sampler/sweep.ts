/** One sweep of a replica: what `replica.ts` says of the schedule and of warm-up, done on a state in place. */
import { endLadderWindow, freezeLadder, lastStone, learnLadder, stepLadder } from './ladder';
import { addEntry, emptySums } from './log-sums';
import { canPropose, freezeArchive, remember, stepDifferential } from './moves/differential';
import type { DifferentialState } from './moves/differential';
import { stepJump } from './moves/jump';
import type { JumpWeights } from './moves/jump';
import { adoptShape, freeze, learnShape, stepRandomWalk } from './moves/random-walk';
import { createCandidate } from './point';
import type { Candidate } from './point';
import { DIFFERENTIAL, endsWindow, LADDER, moveNames, walksOf } from './schedule';
import type { JumpProposal, RandomWalkState, ReplicaState, Rng, SamplerSettings, Target } from './types';

/** Share of the jumps of warm-up from which on they are trusted to move the chain. */
const JUMPS_DO = 0.3;

/** Makes sweep after sweep on `state`, in place; the generator's state is the caller's to keep. */
export class Sweep {
  /** By move, in the order of the state's; null without a clock. The ladder's time is all under its swaps. */
  readonly milliseconds: Float64Array | null;
  private readonly candidate: Candidate;
  private readonly walks: RandomWalkState[];
  private readonly differential: DifferentialState | null;
  private readonly weights: JumpWeights = { proposed: 0, present: 0 };
  /** Place of the normalised jump among the jumps, or −1. */
  private readonly normalised: number;
  private readonly ladderAt: number;
  private since = 0;

  constructor(
    private readonly target: Target,
    private readonly jumps: readonly JumpProposal[],
    private readonly settings: SamplerSettings,
    private readonly state: ReplicaState,
    private readonly rng: Rng,
    private readonly clock: (() => number) | undefined,
  ) {
    const names = moveNames(target, jumps, settings);
    this.candidate = createCandidate(target.names.length);
    this.walks = [...walksOf(target, settings).keys()].map(
      (name) => state.moveState[name] as RandomWalkState,
    );
    this.differential = settings.differential ? (state.moveState[DIFFERENTIAL] as DifferentialState) : null;
    this.normalised = settings.ladder ? jumps.findIndex((jump) => jump.normalised === true) : -1;
    this.ladderAt = names.indexOf(LADDER[0]);
    this.milliseconds = clock ? new Float64Array(names.length) : null;
  }

  /** One recorded draw. */
  make(): void {
    const { state, rng, target, candidate } = this;
    const adapting = state.draws < state.warmup;
    if (this.clock) this.since = this.clock();
    this.climb(adapting);
    let move = 0;
    for (const jump of this.jumps) {
      const watched = move === this.normalised && state.stones ? this.weights : undefined;
      this.count(move, stepJump(rng, target, state, candidate, jump, 1, watched));
      if (watched) this.noteStone(watched);
      this.mark(move++);
    }
    if (adapting || !this.sitsOut()) {
      for (const walk of this.walks) {
        this.count(move, stepRandomWalk(rng, target, state, candidate, walk, adapting));
        this.mark(move++);
      }
      if (this.differential && !adapting && canPropose(this.differential)) {
        this.count(move, stepDifferential(rng, target, state, candidate, this.differential));
        this.mark(move);
      }
    }
    state.draws++;
    if (adapting) this.adapt();
  }

  /** Whether walks and differential evolution aren't due at this draw. */
  private sitsOut(): boolean {
    const { walkEvery = 1 } = this.settings;
    return this.state.jumpsDo === true && this.state.draws % walkEvery !== 0;
  }

  private climb(adapting: boolean): void {
    const { state, rng, target, jumps, candidate } = this;
    const { ladder } = state;
    if (!ladder || state.draws % ladder.every !== 0) return;
    const counts = stepLadder(rng, target, jumps, ladder, state, candidate, adapting);
    [counts.swaps, counts.jumps, counts.walks].forEach(({ proposed, accepted }, i) => {
      state.moves[this.ladderAt + i].proposed += proposed;
      state.moves[this.ladderAt + i].accepted += accepted;
    });
    this.mark(this.ladderAt);
  }

  /** From the jump as from a ladder of one stone: the weight's root at what was proposed, its inverse where it was proposed from. */
  private noteStone({ proposed, present }: JumpWeights): void {
    const { state, target } = this;
    const logs = [proposed / 2, -present / 2];
    if (target.evidence) logs.push(lastStone(target.evidence, state.logLikelihood));
    if (state.stones) addEntry(state.stones, logs);
  }

  private count(move: number, accepted: boolean): void {
    const counted = this.state.moves[move];
    counted.proposed++;
    if (accepted) counted.accepted++;
  }

  private mark(move: number): void {
    if (!this.clock || !this.milliseconds) return;
    const now = this.clock();
    this.milliseconds[move] += now - this.since;
    this.since = now;
  }

  private adapt(): void {
    const { state, walks, differential, settings } = this;
    const { periods } = this.target;
    const { draws, warmup, ladder } = state;
    const end = warmup - Math.ceil(warmup / 10);
    const closing = endsWindow(draws, warmup);
    for (const walk of walks) {
      if (draws <= end) learnShape(walk, state.x, periods);
      if (closing) adoptShape(walk);
    }
    if (differential) remember(differential, state.x, draws, warmup);
    if (ladder && settings.ladder) {
      if (draws <= end && (draws - 1) % ladder.every === 0) learnLadder(ladder, periods);
      if (closing) {
        endLadderWindow(ladder, settings.ladder, draws < end);
        ladder.every = this.ladderRests()
          ? Math.max(settings.ladder.everyInWarmup, Math.ceil(settings.ladder.everyWhereJumpsDo / 10))
          : settings.ladder.everyInWarmup;
      }
    }
    if (draws === warmup) this.freeze();
  }

  /** Whether the jumps so far were accepted often enough; during warm-up counts are of all of it. */
  private jumpsDo(): boolean {
    const [jump] = this.state.moves;
    return this.jumps.length > 0 && jump.accepted >= JUMPS_DO * jump.proposed;
  }

  /** Whether jumps do what the ladder is for: move the chain and give the evidence. */
  private ladderRests(): boolean {
    return this.normalised >= 0 && this.jumpsDo();
  }

  /** The end of warm-up: nothing adapts any more, and counts and sums begin. */
  private freeze(): void {
    const { state, walks, differential, settings, target } = this;
    walks.forEach(freeze);
    if (differential) freezeArchive(differential, target.periods);
    if (this.jumps.length > 0) state.jumpsDo = this.jumpsDo();
    if (state.ladder && settings.ladder) {
      const { every, everyWhereJumpsDo } = settings.ladder;
      const rests = this.ladderRests();
      freezeLadder(state.ladder, target, rests ? everyWhereJumpsDo : every, rests);
      if (rests) state.stones = emptySums(2 + (target.evidence ? 1 : 0));
    }
    for (const move of state.moves) {
      move.proposed = 0;
      move.accepted = 0;
    }
  }
}
