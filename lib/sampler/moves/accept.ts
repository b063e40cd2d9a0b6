/** The Metropolis–Hastings decision: Hastings (1970), Biometrika 57, 97. */
import { copyPoint } from '../point';
import type { Candidate, Point } from '../point';
import type { Rng } from '../types';

/** Takes the candidate with probability min(1, exp(logRatio)); tells whether it did. `logRatio` is not NaN. */
export function decide(rng: Rng, point: Point, candidate: Candidate, logRatio: number): boolean {
  if (logRatio < 0 && Math.log(rng.uniform()) >= logRatio) return false;
  copyPoint(candidate, point);
  return true;
}
