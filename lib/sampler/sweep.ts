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
/** Most that other moves sit out, in what the settings say. */
const LONGEST_REST = 20;

/** Makes sweep after sweep on `state`, in place; the generator's state is the caller's to keep. */
export class Sweep {
  /** By move, in the order of the state's; null without a clock. The ladder's time is all under its swaps. */
  readonly milliseconds: Float64Array | null;
  private readonly candidate: Candidate;
  private readonly walks: RandomWalkState[];
  private readonly differential: DifferentialState | null;
  private readonly stone = new Float64Array(3);
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
    const { rest, draws } = this.state;
    return walkEvery > 1 && rest !== undefined && draws % (walkEvery * rest) !== 0;
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
    const { state, target, stone } = this;
    stone[0] = proposed / 2;
    stone[1] = -present / 2;
    if (target.evidence) stone[2] = lastStone(target.evidence, state.logLikelihood);
    if (state.stones) addEntry(state.stones, stone);
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
        const { everyInWarmup, everyWhereJumpsDo } = settings.ladder;
        const rest = this.restOfLadder();
        ladder.every =
          rest > 0 ? Math.max(everyInWarmup, Math.ceil((everyWhereJumpsDo * rest) / 10)) : everyInWarmup;
      }
    }
    if (draws === warmup) this.freeze();
  }

  /**
   * How many times as long as the settings say other moves may sit out: jumps accepted for one rejected, 0 where they are accepted too
   * seldom. What a walk adds is where a jump was rejected, so its worth for its cost falls as that number rises. During warm-up
   * counts are of all of it.
   */
  private rest(): number {
    const [{ accepted, proposed }] = this.state.moves;
    if (this.jumps.length === 0 || accepted < JUMPS_DO * proposed) return 0;
    return Math.min(LONGEST_REST, Math.max(1, Math.round(accepted / (proposed - accepted))));
  }

  /** The same for the ladder: 0 also where jumps don't do all that it is for, move the chain and give the evidence. */
  private restOfLadder(): number {
    return this.normalised >= 0 ? this.rest() : 0;
  }

  /** The end of warm-up: nothing adapts any more, and counts and sums begin. */
  private freeze(): void {
    const { state, walks, differential, settings, target } = this;
    walks.forEach(freeze);
    if (differential) freezeArchive(differential, target.periods);
    const rest = this.rest();
    if (rest > 0) state.rest = rest;
    if (state.ladder && settings.ladder) {
      const { every, everyWhereJumpsDo } = settings.ladder;
      const rests = this.restOfLadder() > 0;
      freezeLadder(state.ladder, target, rests ? everyWhereJumpsDo * rest : every, rests);
      if (rests) state.stones = emptySums(2 + (target.evidence ? 1 : 0));
    }
    for (const move of state.moves) {
      move.proposed = 0;
      move.accepted = 0;
    }
  }
}
