import { describe, expect, it } from 'vitest';
import { defaultPrior } from '@/lib/services/default-priors';
import { findTemplate, type ParameterDeclaration } from '@/lib/templates';

const declared = (template: string, options: object, name: string): ParameterDeclaration => {
  const found = findTemplate(template)
    .parameters(options)
    .find((declaration) => declaration.name === name);
  if (!found) throw new Error(`${template} has no ${name}`);
  return found;
};
const a1 = declared('free-phase', { amplitudes: 'quadrature' }, 'a1');
const A1 = declared('free-phase', { amplitudes: 'amplitude-phase' }, 'A1');
const background = (power: number) =>
  declared('background', { background: [power] }, power < 0 ? 'cm1' : `c${power}`);

const kappa = [0.01, 0.04, 0.25];

describe('the default prior', () => {
  it('is the template’s where the data are within its reach', () => {
    const data = { kappa, S: [0.1, -0.2, 0.4] };
    for (const declaration of [a1, A1, background(1), background(-1)]) {
      expect(defaultPrior(declaration, data)).toEqual(declaration.defaultPrior);
    }
  });

  it('of a quadrature has three times the median of |S|/√κ as sd, where that is beyond 3 sd', () => {
    // |S|/√κ = 4, 5, 600: the median is 5, three times that is 15.
    expect(defaultPrior(a1, { kappa, S: [0.4, -1, 300] })).toEqual({ kind: 'normal', mean: 0, sd: 20 });
  });

  it('of an amplitude ends at three times the median, where that is beyond its end', () => {
    expect(defaultPrior(A1, { kappa, S: [0.4, -1, 300] })).toEqual({ kind: 'uniform', lo: 0, hi: 20 });
  });

  it('of a background term reaches max |S| over the largest κ^p', () => {
    const data = { kappa, S: [0.1, 0.2, -5] };
    // 5/0.25 = 20, 5/0.25² = 80, and 5/0.01⁻¹ = 0.05.
    expect(defaultPrior(background(1), data)).toEqual({ kind: 'normal', mean: 0, sd: 60 });
    expect(defaultPrior(background(2), data)).toEqual({ kind: 'normal', mean: 0, sd: 300 });
    expect(defaultPrior(background(-1), data)).toEqual(background(-1).defaultPrior);
  });

  it('is the template’s for masses, phases, angles and the coupling, whatever the data', () => {
    const data = { kappa, S: [1e3, 1e3, 1e3] };
    const locked = findTemplate('locked-squeezed').parameters({ fields: 2, phases: 'free' });
    for (const declaration of locked.filter(({ role }) => role !== 'background')) {
      expect(defaultPrior(declaration, data)).toEqual(declaration.defaultPrior);
    }
  });

  it('doesn’t look at what is blind', () => {
    expect(defaultPrior(a1, null)).toEqual(a1.defaultPrior);
  });
});
