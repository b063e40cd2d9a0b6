import type { Notebook } from '@/lib/schemas';
import { renderToStaticMarkup } from 'react-dom/server';
import { describe, expect, it } from 'vitest';
import { Abstract } from '@/components/notebook/abstract';
import { accurateKappa, backgroundTermsFor, leadingCorrection } from '@/components/notebook/accuracy';
import { withBestAmplitudes } from '@/components/notebook/best-amplitudes';
import { chiSquare, keepPoints, keptRows } from '@/components/notebook/kept-points';
import { beatEnvelope, compilePrediction, curvesOf, judge } from '@/components/notebook/prediction';
import { findPriorFaults } from '@/components/notebook/prior-faults';
import { priorEnds, priorQuantile, sliderStep, startValues } from '@/components/notebook/prior-values';
import { convertPrior, kindsFor, priorInWords } from '@/components/notebook/prior-words';
import { ownPriors } from '@/components/notebook/priors-section';
import { chainsState, isOutdated, posteriorState, sectionState } from '@/components/notebook/section-states';
import { carryOver } from '@/components/notebook/template-form';
import { moved } from '@/components/notebook/template-sliders';
import { findTemplate, type Prior } from '@/lib/templates';
import { fitFixture, measurementFixture, notebookFixture } from './fixtures';

const measurement = measurementFixture();
const twoFields = { id: 'free-phase', options: { fields: 2, background: [1] } };
const text = (node: React.ReactNode) => renderToStaticMarkup(node).replace(/<[^>]+>/g, '');

describe('cuts in the browser', () => {
  it('keep bins that lie inside with both edges, to a relative tolerance of 1e-9', () => {
    expect(keptRows(measurement.points, {})).toEqual([0, 1, 2, 3]);
    expect(keptRows(measurement.points, { kappaMax: 0.08 * (1 - 5e-10) })).toEqual([0, 1, 2]);
    expect(keptRows(measurement.points, { kappaMin: 0.011, kappaMax: 0.15 })).toEqual([1, 2]);
  });

  it('leave χ² of the kept bins with their block of the covariance', () => {
    const points = keepPoints(measurement, { kappaMax: 0.04 });
    // (0.1/0.1)² + (−0.1/0.1)² by hand.
    expect(chiSquare(points, [0, 0])).toBeCloseTo(2, 12);
    expect(chiSquare({ ...points, factor: null }, [0, 0])).toBeCloseTo(2, 12);
  });

  it('take correlations into account', () => {
    const points = keepPoints(
      measurementFixture({
        covariance: [
          [2, 1],
          [1, 2],
        ]
          .map((row) => [...row, 0, 0])
          .concat([
            [0, 0, 1, 0],
            [0, 0, 0, 1],
          ]),
      }),
      { kappaMax: 0.04 },
    );
    // (1, 1)ᵀ [[2, 1], [1, 2]]⁻¹ (1, 1) = 2/3.
    expect(chiSquare(points, [points.S[0] - 1, points.S[1] - 1])).toBeCloseTo(2 / 3, 12);
  });
});

describe('predictions under the sliders', () => {
  const prediction = compilePrediction(twoFields, keepPoints(measurement, {}));
  // mu1 a1 b1 mu2 a2 b2 c1
  const x = [2, 1, 0.5, 5, -0.3, 0.8, 0.7];

  it('draw fields alone that add up, with the background, to the sum', () => {
    const [sum, first, second] = curvesOf(prediction, x);
    prediction.kappa.forEach((kappa, i) => {
      expect(first.y[i] + second.y[i] + 0.7 * kappa).toBeCloseTo(sum.y[i], 12);
    });
  });

  it('have an envelope that the beat touches and never leaves', () => {
    const [sum] = curvesOf(prediction, x);
    const envelope = beatEnvelope(prediction.fine, x, prediction.kappa);
    const share = prediction.kappa.map((kappa, i) => Math.abs(sum.y[i] - 0.7 * kappa) / envelope![i]);
    expect(Math.max(...share)).toBeLessThanOrEqual(1 + 1e-12);
    expect(Math.max(...share)).toBeGreaterThan(0.999);
  });

  it('are judged on the bins, averaged over them', () => {
    const predicted = prediction.onData.predict(x);
    expect(prediction.onData.options.binAverage).toBe(true);
    expect(judge(prediction, x).residuals[2]).toBeCloseTo((0.3 - predicted[2]) / 0.2, 12);
  });

  it('find the amplitudes that fit best while masses stand still', () => {
    const truth = compilePrediction(
      { id: 'free-phase', options: { fields: 1, background: [] } },
      keepPoints(measurement, {}),
    );
    const { parameters } = truth.fine;
    const S = truth.onData.predict([2, 0.6, -0.4]);
    const points = { ...truth.points, S };
    const wide: Record<string, Prior> = {
      a1: { kind: 'uniform', lo: -10, hi: 10 },
      b1: { kind: 'uniform', lo: -10, hi: 10 },
    };
    const found = withBestAmplitudes({ ...truth, data: points }, parameters, wide, [2, 0, 0]);
    expect(found[1]).toBeCloseTo(0.6, 8);
    expect(found[2]).toBeCloseTo(-0.4, 8);
    const narrow = withBestAmplitudes(
      { ...truth, data: points },
      parameters,
      { ...wide, a1: { kind: 'uniform', lo: 0, hi: 0.5 } },
      [2, 0, 0],
    );
    expect(narrow[1]).toBe(0.5);
  });
});

describe('sliders', () => {
  const template = compilePrediction(twoFields, keepPoints(measurement, {})).fine;
  const { parameters } = template;

  it('start with masses of one prior spread over it in order', () => {
    const start = startValues(template, {});
    expect(start[0]).toBeCloseTo(0.2 + 7.8 / 3, 9);
    expect(start[3]).toBeCloseTo(0.2 + (2 * 7.8) / 3, 9);
  });

  it('take the masses that they pass along', () => {
    const x = [2, 0, 0, 5, 0, 0, 0];
    expect(moved(x, template, 0, 6)[3]).toBe(6);
    expect(moved(x, template, 3, 1)[0]).toBe(1);
    expect(moved(x, template, 1, 9)).toEqual([2, 9, 0, 5, 0, 0, 0]);
  });

  it('keep ν descending among light fields and leave heavy ones alone', () => {
    const kinds = { id: 'locked-exact', options: { fields: ['light', 'light', 'heavy'], background: [1] } };
    const mixed = compilePrediction(kinds, keepPoints(measurement, {})).fine;
    expect(mixed.parameters.slice(0, 3).map(({ name }) => name)).toEqual(['nu1', 'nu2', 'mu1']);
    const start = startValues(mixed, {});
    expect(start[0]).toBeCloseTo((1.4 * 2) / 3, 9);
    expect(start[1]).toBeCloseTo(1.4 / 3, 9);
    expect(start[2]).toBeCloseTo(0.2 + 7.8 / 2, 9);
    expect(moved(start, mixed, 1, 1.2).slice(0, 3)).toEqual([1.2, 1.2, start[2]]);
    expect(moved(start, mixed, 2, 0.3).slice(0, 3)).toEqual([start[0], start[1], 0.3]);
  });

  it('run over the prior, or four standard deviations about its mean', () => {
    expect(priorEnds({ kind: 'normal', mean: 1, sd: 2 }, parameters[1])).toEqual([-7, 9]);
    expect(priorEnds({ kind: 'uniform', lo: 1, hi: 12 }, parameters[0])).toEqual([1, 12]);
    expect(priorQuantile({ kind: 'normal', mean: 1, sd: 2 }, 0.5)).toBeCloseTo(1, 9);
    expect(sliderStep(0, 8)).toBe(0.02);
  });
});

describe('accuracy of the squeezed template', () => {
  // Derived by us: κ at which |F − 1| of the exact factor reaches 5 %, for V1 and V2 at μ = 1, 2, 5.
  it.each([
    [1, 0.333, 0.399],
    [2, 0.364, 0.403],
    [5, 0.34, 0.349],
  ])('follows the exact hypergeometric factor to 5 %% of κ at μ = %s', (mu, first, second) => {
    expect(Math.abs(accurateKappa(mu, mu, 0.05, [1]) / first - 1)).toBeLessThan(0.05);
    expect(Math.abs(accurateKappa(mu, mu, 0.05, [2]) / second - 1)).toBeLessThan(0.05);
  });

  it('is set by the worst of the masses and interactions that are possible', () => {
    expect(accurateKappa(1, 8, 0.05, [1, 2])).toBe(
      Math.min(accurateKappa(1, 8, 0.05, [1]), accurateKappa(1, 8, 0.05, [2])),
    );
    expect(leadingCorrection(0, 1)).toBeCloseTo((2.5 * 3.5) / 16, 12);
    expect([1.5, 3, 6].map(backgroundTermsFor)).toEqual([2, 3, 4]);
  });
});

describe('priors in words and fields', () => {
  const template = findTemplate('locked-squeezed');
  const parameters = template.parameters({ fields: 2 });
  const named = (name: string) => parameters.find((each) => each.name === name)!;

  it('say bounds that are turns by name', () => {
    expect(priorInWords({ kind: 'uniform', lo: 0, hi: Math.PI / 2 })).toBe('uniform 0 to π/2');
    expect(priorInWords({ kind: 'normal', mean: 0, sd: 30 })).toBe('normal 0, 30');
  });

  it('offer isotropic to mixing angles alone, and a normal only where both signs are possible', () => {
    expect(kindsFor(named('theta'))).toContain('isotropic');
    expect(kindsFor(named('g'))).not.toContain('isotropic');
    expect(kindsFor(named('g'))).toContain('normal');
    expect(kindsFor(named('mu1'))).not.toContain('normal');
  });

  it('change their kind without leaving the template’s range', () => {
    const made = convertPrior('uniform', [0, Math.PI / 2], named('theta'));
    expect(made).toEqual({ kind: 'uniform', lo: 0, hi: Math.PI / 2 });
    expect(convertPrior('log-uniform', [0, 8], named('mu1'))).toEqual({
      kind: 'log-uniform',
      lo: 0.08,
      hi: 8,
    });
  });

  it('are faulted at the number that is wrong, with the remedy', () => {
    const { fine } = compilePrediction(
      { id: 'locked-squeezed', options: { fields: 2 } },
      keepPoints(measurement, {}),
    );
    const priors = Object.fromEntries(fine.parameters.map(({ name, defaultPrior }) => [name, defaultPrior]));
    expect(findPriorFaults(fine, priors)).toEqual({ byField: {}, byParameter: {}, joint: null });
    const faults = findPriorFaults(fine, { ...priors, mu1: { kind: 'uniform', lo: 3, hi: 2 } });
    expect(Object.keys(faults.byField.mu1)).toEqual(['lo']);
    expect(faults.byParameter.mu1).toMatch(/lo must be below hi/);
    const apart = findPriorFaults(fine, {
      ...priors,
      mu1: { kind: 'uniform', lo: 6, hi: 8 },
      mu2: { kind: 'uniform', lo: 1, hi: 2 },
    });
    expect(apart.joint).toMatch(/order/);
  });

  it('are saved as far as they were changed', () => {
    const origin: Record<string, Prior> = {
      a: { kind: 'half-normal', sd: 1 },
      b: { kind: 'fixed', value: 2 },
    };
    expect(ownPriors({ origin, value: { ...origin, b: { kind: 'fixed', value: 3 } } })).toEqual({
      b: { kind: 'fixed', value: 3 },
    });
  });
});

describe('another template', () => {
  it('takes over the options that it has, and no others', () => {
    const options = { fields: 4, amplitudes: 'quadrature', background: [1, 2, 3] };
    expect(carryOver('locked-squeezed', options)).toEqual({
      id: 'locked-squeezed',
      options: { fields: 4, background: [1, 2, 3] },
    });
    expect(carryOver('background', options).options).toEqual({ background: [1, 2, 3] });
  });
});

describe('states of the sections', () => {
  const notebook = notebookFixture();

  it('are being set while changes aren’t saved, and settled else', () => {
    expect(sectionState(true, notebook).word).toBe('being set');
    expect(sectionState(false, notebook).word).toBe('settled');
  });

  it('call a fit outdated by a new prior, not by a new title', () => {
    expect(isOutdated(1, notebook)).toBe(false);
    const changed = notebookFixture({
      record: [...notebook.record, { ...notebook.record[1], revision: 3, sections: ['priors'] }],
    });
    expect(isOutdated(2, changed)).toBe(true);
    expect(chainsState({ number: 1, status: 'converged', revision: 2 }, changed)).toEqual({
      kind: 'old',
      word: 'of revision 2',
    });
    expect(chainsState({ number: 1, status: 'sampling', revision: 2 }, changed).kind).toBe('run');
  });

  it('doesn’t call a fit old whose settings were brought back on the same version', () => {
    const entry = (
      revision: number,
      sections: Notebook['record'][number]['sections'],
      restoredFrom?: number,
    ) => ({
      ...notebook.record[0],
      revision,
      sections,
      restoredFrom: restoredFrom ?? null,
    });
    const first = entry(1, ['title', 'measurement', 'template', 'priors']);
    const back = { record: [first, entry(2, ['template', 'priors']), entry(3, ['template', 'priors'], 1)] };
    expect([1, 2, 3].map((revision) => isOutdated(revision, back))).toEqual([false, true, false]);
    // Another version was taken up in between: the settings came back, the numbers didn't.
    const moved = { record: [first, entry(2, ['measurement', 'priors']), entry(3, ['priors'], 1)] };
    expect([1, 2, 3].map((revision) => isOutdated(revision, moved))).toEqual([true, true, false]);
  });

  it('let the posterior wait for draws, and withhold it while blind', () => {
    expect(posteriorState(null, notebook)).toEqual({ kind: 'wait', word: 'waits for 5' });
    expect(posteriorState(fitFixture({ status: 'converged' }), notebook)).toEqual({
      kind: 'ok',
      word: 'of fit 4',
    });
    expect(posteriorState(fitFixture(), notebookFixture({ blind: true })).kind).toBe('blind');
  });
});

describe('the abstract', () => {
  it('is made from cuts, template and the last fit', () => {
    const notebook = notebookFixture({ cuts: { kappaMax: 0.08 }, bins: { kept: 3, all: 4 } });
    expect(text(<Abstract notebook={notebook} measurement={measurement} fit={null} />)).toBe(
      'Three bins with 0.01 ≤ κ ≤ 0.08; one field with free amplitudes; background in κ. No fit yet.',
    );
    expect(text(<Abstract notebook={notebook} measurement={measurement} fit={fitFixture()} />)).toMatch(
      /Fit 4 is sampling; one of two quantities meets the gate\.$/,
    );
  });
});
