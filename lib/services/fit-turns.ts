/** Whose turn it is: arithmetic on counts and times alone, so that the page's place in the queue is the workers' own order. */

/** A fit, or a check, that nobody holds and that isn't to its end: both take turns in one queue. */
export interface WaitingFit {
  kind: 'fit' | 'check';
  id: string;
  groupId: string;
  /** It was sampled before: its worker died or gave it back. */
  begun: boolean;
  /** Milliseconds since 1970. */
  queuedAt: number;
  expectedSeconds: number;
}

/** What a group uses and may use. */
export interface GroupLoad {
  /** Fits and checks that workers hold. */
  running: number;
  limit: number;
  /** Seconds of sampling, each weighed by a half for every hour since. */
  recentSeconds: number;
  /** Milliseconds since 1970 at which a fit of it last ended; null where none did of late. */
  servedAt: number | null;
}

export type Loads = ReadonlyMap<string, GroupLoad>;

/**
 * Within a group: what was begun goes on first; then the one with the smallest sum of the time at which it was queued and
 * the time that it is expected to take. Short fits so overtake long ones, but only those that were queued later by less than
 * the difference: a long fit's rank never falls behind what comes after that, so that it can't starve.
 */
const dueAt = ({ queuedAt, expectedSeconds }: WaitingFit): number => queuedAt + expectedSeconds * 1000;

function compareFits(a: WaitingFit, b: WaitingFit): number {
  if (a.begun !== b.begun) return a.begun ? -1 : 1;
  return dueAt(a) - dueAt(b) || (a.id < b.id ? -1 : 1);
}

interface Candidate {
  groupId: string;
  running: number;
  debt: number;
  fit: WaitingFit;
}

/**
 * Between groups: the one with the fewest fits running, then the one that used least of late. Time for which it waited with
 * nothing running is taken off what a group used, so that one that used much isn't passed over for ever by ones that come
 * anew.
 */
function compareGroups(a: Candidate, b: Candidate): number {
  return a.running - b.running || a.debt - b.debt || compareFits(a.fit, b.fit);
}

function candidates(waiting: readonly WaitingFit[], loads: Loads, now: number): Candidate[] {
  const groups = new Map<string, WaitingFit[]>();
  for (const fit of waiting) groups.set(fit.groupId, [...(groups.get(fit.groupId) ?? []), fit]);
  return [...groups].map(([groupId, fits]) => {
    const { running = 0, recentSeconds = 0, servedAt = null } = loads.get(groupId) ?? {};
    const since = Math.max(servedAt ?? 0, Math.min(...fits.map(({ queuedAt }) => queuedAt)));
    const waited = running > 0 ? 0 : (now - since) / 1000;
    const [fit] = fits.sort(compareFits);
    return { groupId, running, debt: Math.max(0, recentSeconds - Math.max(0, waited)), fit };
  });
}

const atLimit = (loads: Loads, groupId: string): boolean => {
  const load = loads.get(groupId);
  return load !== undefined && load.running >= load.limit;
};

/** The fit that a free place is for; null where every group that waits is at its limit. */
export function nextFit(waiting: readonly WaitingFit[], loads: Loads, now: number): WaitingFit | null {
  const open = candidates(waiting, loads, now).filter(({ groupId }) => !atLimit(loads, groupId));
  return open.sort(compareGroups)[0]?.fit ?? null;
}

/**
 * The order in which waiting fits will be taken as things stand. Where all that wait are at their limit, the group with the
 * fewest fits is taken to have one of them end.
 */
export function turnOrder(waiting: readonly WaitingFit[], loads: Loads, now: number): WaitingFit[] {
  const order: WaitingFit[] = [];
  let left = [...waiting];
  const after = new Map(loads);
  while (left.length > 0) {
    const next = nextFit(left, after, now) ?? candidates(left, after, now).sort(compareGroups)[0].fit;
    order.push(next);
    left = left.filter(({ id }) => id !== next.id);
    const load = after.get(next.groupId) ?? { running: 0, limit: Infinity, recentSeconds: 0, servedAt: null };
    after.set(next.groupId, { ...load, running: load.running + 1 });
  }
  return order;
}
