import { joint, marginal, type Joint, type Marginal } from './corner';

/** What a corner view of some parameters shows, apart from its size. */
export interface CornerSketch {
  /** Places of the shown parameters among all, in the order of the panels. */
  shown: readonly number[];
  marginals: readonly Marginal[];
  /** `joints[r][c]`, c < r: row r's parameter against column c's. */
  joints: readonly (readonly Joint[])[];
}

/**
 * Makes sketches of one set of draws and remembers their pieces, so that choosing another parameter costs its own panels
 * alone.
 *
 * @param draws one array a parameter, all of one length
 * @returns a function from the shown parameters' places to their sketch
 */
export function cornerSketcher(
  draws: readonly ArrayLike<number>[],
): (shown: readonly number[]) => CornerSketch {
  const marginals = new Map<number, Marginal>();
  const joints = new Map<string, Joint>();
  const marginalOf = (i: number): Marginal => {
    const made = marginals.get(i) ?? marginal(draws[i]);
    marginals.set(i, made);
    return made;
  };
  const jointOf = (x: number, y: number): Joint => {
    const key = `${x} ${y}`;
    const made = joints.get(key) ?? joint(draws[x], draws[y], marginalOf(x).axis, marginalOf(y).axis);
    joints.set(key, made);
    return made;
  };
  return (shown) => ({
    shown: [...shown],
    marginals: shown.map(marginalOf),
    joints: shown.map((y, r) => shown.slice(0, r).map((x) => jointOf(x, y))),
  });
}
