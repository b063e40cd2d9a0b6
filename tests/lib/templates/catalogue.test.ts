import katex from 'katex';
import { describe, expect, it } from 'vitest';
import { compileTemplate, findTemplate, templateCatalogue } from '@/lib/templates';
import type { Axis } from '@/lib/templates';

const points: Axis = { kind: 'points', kappa: Float64Array.of(0.01, 0.1) };
const bins: Axis = { kind: 'bins', lo: Float64Array.of(0.01), hi: Float64Array.of(0.1), weightPower: 0 };

const names = (id: string, options: object): string[] =>
  findTemplate(id)
    .parameters(options)
    .map(({ name }) => name);

describe('the list of templates', () => {
  it('is background, free-phase, locked-squeezed, locked-exact, light, in this order', () => {
    expect(templateCatalogue().map(({ id }) => id)).toEqual([
      'background',
      'free-phase',
      'locked-squeezed',
      'locked-exact',
      'light',
    ]);
  });
  it('survives JSON unchanged', () => {
    expect(JSON.parse(JSON.stringify(templateCatalogue()))).toEqual(templateCatalogue());
  });
  it('gives every option its default, and the defaults settle to themselves', () => {
    for (const { id, options } of templateCatalogue()) {
      const defaults = Object.fromEntries(options.map((option) => [option.name, option.default]));
      const settled = findTemplate(id).normaliseOptions({});
      expect(findTemplate(id).normaliseOptions(defaults)).toEqual(settled);
      expect(findTemplate(id).normaliseOptions(settled)).toEqual(settled);
    }
  });
});

describe('parameters', () => {
  it('come field by field in the free-phase template', () => {
    expect(names('free-phase', { fields: 2 })).toEqual(['mu1', 'a1', 'b1', 'mu2', 'a2', 'b2', 'c1', 'c2']);
    expect(names('free-phase', { fields: 2, amplitudes: 'amplitude-phase', background: [0] })).toEqual([
      'mu1',
      'A1',
      'phi1',
      'mu2',
      'A2',
      'phi2',
      'c0',
    ]);
  });
  it('come as masses, angles, coupling, phases, vertex angle and background in the locked template', () => {
    expect(names('locked-squeezed', {})).toEqual(['mu1', 'g', 'c1', 'c2']);
    expect(names('locked-squeezed', { fields: 2, vertex: 'mixture' })).toEqual([
      'mu1',
      'mu2',
      'theta',
      'g',
      'alpha',
      'c1',
      'c2',
    ]);
    expect(
      names('locked-squeezed', { fields: 3, phases: 'free', vertex: 'mixture', background: [-1] }),
    ).toEqual(['mu1', 'mu2', 'mu3', 'theta12', 'theta13', 'g', 'phi1', 'phi2', 'phi3', 'alpha', 'cm1']);
    expect(names('locked-squeezed', { fields: 4, background: [] })).toEqual([
      'mu1',
      'mu2',
      'mu3',
      'mu4',
      'angle1',
      'angle2',
      'angle3',
      'g',
    ]);
  });
  it('have the stated default priors', () => {
    const all = [
      ...findTemplate('free-phase').parameters({}),
      ...findTemplate('free-phase').parameters({ amplitudes: 'amplitude-phase' }),
      ...findTemplate('locked-squeezed').parameters({ fields: 2, vertex: 'mixture' }),
    ];
    const priors = Object.fromEntries(all.map(({ name, defaultPrior }) => [name, defaultPrior]));
    expect(priors).toEqual({
      mu1: { kind: 'uniform', lo: 0.2, hi: 8 },
      mu2: { kind: 'uniform', lo: 0.2, hi: 8 },
      a1: { kind: 'normal', mean: 0, sd: 1 },
      b1: { kind: 'normal', mean: 0, sd: 1 },
      A1: { kind: 'uniform', lo: 0, hi: 3 },
      phi1: { kind: 'uniform', lo: -Math.PI, hi: Math.PI },
      theta: { kind: 'isotropic' },
      g: { kind: 'normal', mean: 0, sd: 30 },
      alpha: { kind: 'uniform', lo: -Math.PI / 2, hi: Math.PI / 2 },
      c1: { kind: 'normal', mean: 0, sd: 3 },
      c2: { kind: 'normal', mean: 0, sd: 3 },
    });
  });
});

describe('options', () => {
  it('are filled in, sorted and written in a fixed order', () => {
    const settled = findTemplate('locked-squeezed').normaliseOptions({ background: [2, -1], vertex: 2 });
    expect(JSON.stringify(settled)).toBe(
      '{"fields":1,"vertex":2,"phases":"locked","background":[-1,2],"binWeight":0}',
    );
    expect(findTemplate('free-phase').normaliseOptions(undefined)).toEqual({
      fields: 1,
      amplitudes: 'quadrature',
      background: [1, 2],
      binWeight: 0,
    });
  });

  const faults: [string, string, unknown, string, string][] = [
    ['an unknown name', 'free-phase', { feilds: 2 }, 'unknown_option', 'options.feilds'],
    ['a vertex for free phases', 'free-phase', { vertex: 1 }, 'unknown_option', 'options.vertex'],
    ['fields in the background', 'background', { fields: 1 }, 'unknown_option', 'options.fields'],
    ['no field', 'free-phase', { fields: 0 }, 'invalid_option', 'options.fields'],
    ['five fields', 'locked-squeezed', { fields: 5 }, 'invalid_option', 'options.fields'],
    ['half a field', 'locked-squeezed', { fields: 1.5 }, 'invalid_option', 'options.fields'],
    ['a number in words', 'locked-squeezed', { fields: '2' }, 'invalid_option', 'options.fields'],
    ['an unknown vertex', 'locked-squeezed', { vertex: 3 }, 'invalid_option', 'options.vertex'],
    ['an unknown kind of phases', 'locked-squeezed', { phases: 'fixed' }, 'invalid_option', 'options.phases'],
    [
      'an unknown kind of amplitudes',
      'free-phase',
      { amplitudes: 'polar' },
      'invalid_option',
      'options.amplitudes',
    ],
    ['a power beyond 4', 'free-phase', { background: [1, 5] }, 'invalid_option', 'options.background[1]'],
    ['a power twice', 'free-phase', { background: [1, 1] }, 'invalid_option', 'options.background'],
    ['a background of no power', 'background', { background: [] }, 'invalid_option', 'options.background'],
    ['powers that are no list', 'free-phase', { background: 2 }, 'invalid_option', 'options.background'],
    ['a word for yes', 'free-phase', { binAverage: 'yes' }, 'invalid_option', 'options.binAverage'],
    [
      'a weight that is not a number',
      'free-phase',
      { binWeight: NaN },
      'invalid_option',
      'options.binWeight',
    ],
    ['a list for the options', 'free-phase', [1], 'invalid_option', 'options'],
    ['a name that every object has', 'free-phase', { toString: 1 }, 'unknown_option', 'options.toString'],
  ];
  it.each(faults)('with %s are refused, and place and remedy are named', (_, id, given, code, path) => {
    const refusal = expect.objectContaining({ name: 'TemplateError', code, path });
    expect(() => findTemplate(id).normaliseOptions(given)).toThrow(refusal);
    expect(() => findTemplate(id).normaliseOptions(given)).toThrow(/; (give|this template has) /);
  });

  it('of averaging are settled by the axis, and a contradiction is refused', () => {
    expect(compileTemplate('free-phase', {}, bins).options.binAverage).toBe(true);
    expect(compileTemplate('free-phase', { binAverage: null }, points).options.binAverage).toBe(false);
    expect(compileTemplate('free-phase', {}, { ...bins, weightPower: 2 }).options.binWeight).toBe(2);
    const at = (path: string) => expect.objectContaining({ code: 'invalid_axis', path });
    expect(() => compileTemplate('free-phase', { binAverage: false }, bins)).toThrow(
      at('options.binAverage'),
    );
    expect(() => compileTemplate('free-phase', { binAverage: true }, points)).toThrow(
      at('options.binAverage'),
    );
    expect(() => compileTemplate('free-phase', { binWeight: 3 }, bins)).toThrow(at('options.binWeight'));
  });

  it('of a template that does not exist are not looked at: the error names those that do', () => {
    expect(() => compileTemplate('free', {}, points)).toThrow(
      expect.objectContaining({
        code: 'unknown_template',
        message: expect.stringContaining('locked-squeezed'),
      }),
    );
  });
});

describe('formulas', () => {
  const variants: [string, object][] = [
    ['background', { background: [-1, 0, 1, 2, 3, 4], binWeight: 2 }],
    ...[1, 2, 3, 4].flatMap((fields): [string, object][] => [
      ['free-phase', { fields }],
      ['free-phase', { fields, amplitudes: 'amplitude-phase', binAverage: false }],
      ['locked-squeezed', { fields, vertex: 1 }],
      ['locked-squeezed', { fields, vertex: 'mixture', phases: 'free' }],
    ]),
  ];
  it.each(variants)('of %s with %j are typeset without an error, whole and line by line', (id, options) => {
    const formula = findTemplate(id).formula(options);
    const fields = (options as { fields?: number }).fields ?? 0;
    for (const tex of [formula.wide, ...formula.lines, ...formula.definitions]) {
      expect(() =>
        katex.renderToString(tex, { throwOnError: true, trust: true, strict: false }),
      ).not.toThrow();
    }
    for (const text of [formula.wide, formula.lines.join('')]) {
      expect(text.match(/\\htmlClass\{f\d\}/g) ?? []).toEqual(
        Array.from({ length: fields }, (_, i) => `\\htmlClass{f${i + 1}}`),
      );
    }
    const unspaced = (text: string) => text.replace(/\\quad \{\}|\s/g, '');
    expect(unspaced(formula.lines.join(''))).toBe(unspaced(formula.wide));
  });
  it('show the mean over a bin exactly where there is one', () => {
    expect(findTemplate('free-phase').formula({}).wide).toContain('langle');
    expect(findTemplate('free-phase').formula({ binAverage: false }).wide).not.toContain('langle');
  });
  it('typeset every symbol of a parameter', () => {
    for (const entry of templateCatalogue()) {
      for (const { tex } of [...entry.parameters, ...entry.derived]) {
        expect(() => katex.renderToString(tex, { throwOnError: true })).not.toThrow();
      }
    }
  });
});
