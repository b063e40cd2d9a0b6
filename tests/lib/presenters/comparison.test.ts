import { expect, it } from 'vitest';
import { logRatio } from '@/lib/presenters/comparison';

it('the error of a Bayes factor is propagated from both evidences, with its degrees of freedom', () => {
  const ratio = logRatio({ value: 5, error: 0.3, dof: 20 }, { value: 2, error: 0.4, dof: 30 });
  expect(ratio?.value).toBe(3);
  expect(ratio?.error).toBeCloseTo(0.5, 12);
  // Welch and Satterthwaite: 0.0625 / (0.0081/20 + 0.0256/30).
  expect(ratio?.dof).toBeCloseTo(0.0625 / (0.0081 / 20 + 0.0256 / 30), 9);
  // Beside an exact evidence only the other's error counts.
  expect(logRatio({ value: 5, error: 0.3, dof: 20 }, { value: 2, error: 1e-8, dof: 1e6 })?.dof).toBeCloseTo(
    20,
    6,
  );
  expect(logRatio({ value: 5, error: 0.3, dof: 20 }, { value: 5, error: 0.3, dof: 20 })).toEqual({
    value: 0,
    error: 0,
    dof: 20,
  });
  expect(logRatio(null, { value: 2, error: 0.4, dof: 30 })).toBeNull();
});
