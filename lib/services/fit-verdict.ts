import type { FitStatus } from '@/lib/schemas';
import type { Standing } from './fit-commit';
import { isLook, judgedFrom, type Course } from './fit-schedule';

/**
 * How a fit ends at the draws that it has, or null where it goes on. That a met target ends it is a function of counts of
 * draws alone: it does so only where every run would look, or where the budget is spent.
 */
export function verdict(course: Course, gateMet: boolean, standing: Standing): FitStatus | null {
  const kept = standing.draws - course.warmup;
  const spent = kept >= standing.maxDraws;
  const judged = kept >= Math.max(judgedFrom, standing.targetFrom);
  if (gateMet && judged && (spent || isLook(kept, course.blockDraws))) return 'converged';
  if (spent) return 'budget-spent';
  return standing.stopRequested ? 'stopped' : null;
}
