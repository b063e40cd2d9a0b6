/** Seconds over which the rate of draws is taken. */
const span = 10;

/** Measures how fast a fit goes and how long it has been sampled, from commit to commit. */
export class Pace {
  private readonly marks: { at: number; draws: number }[];
  private last: number;

  constructor(
    private readonly now: () => number,
    private readonly replicas: number,
    draws: number,
  ) {
    this.last = now();
    this.marks = [{ at: this.last, draws }];
  }

  /** To be told at every commit; `draws` recorded draws a replica. */
  mark(draws: number): { milliseconds: number; drawsPerSecond: number | null } {
    const at = this.now();
    const milliseconds = Math.round(at - this.last);
    this.last = at;
    this.marks.push({ at, draws });
    while (this.marks.length > 2 && at - this.marks[1].at > span * 1000) this.marks.shift();
    const [first] = this.marks;
    const seconds = (at - first.at) / 1000;
    return {
      milliseconds,
      drawsPerSecond: seconds > 0 ? (this.replicas * (draws - first.draws)) / seconds : null,
    };
  }
}
