import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { GET as list } from '@/app/api/v1/templates/route';
import { POST as evaluate } from '@/app/api/v1/templates/[id]/evaluate/route';
import { database } from '@/lib/db';
import { evaluatedSchema, templateSchema } from '@/lib/schemas';
import { compileTemplate, squeezedCoefficient, templateCatalogue } from '@/lib/templates';
import { call, closeConnections, createToken, createUser, errorOf } from './harness';

let token: string;
beforeAll(async () => {
  database();
  token = await createToken(await createUser());
});
afterAll(closeConnections);

const at = (id: string, json: Record<string, unknown>) => call(evaluate, { params: { id }, token, json });
const S = async (id: string, json: Record<string, unknown>) => {
  const answer = await at(id, json);
  if (answer.status !== 200) throw new Error(await answer.text());
  return evaluatedSchema.parse(await answer.json()).S;
};

describe('the list of templates', () => {
  it('has every template with options, parameters, default priors and formula, as the library has them', async () => {
    const answer = await call(list, { token });
    expect(answer.status).toBe(200);
    const body: unknown = await answer.json();
    expect(body).toEqual(JSON.parse(JSON.stringify(templateCatalogue())));
    const templates = templateSchema.array().parse(body);
    expect(templates.map(({ id }) => id)).toEqual([
      'background',
      'free-phase',
      'locked-squeezed',
      'locked-exact',
      'light',
    ]);
  });

  it('asks who is there', async () => {
    expect((await call(list)).status).toBe(401);
  });
});

describe('an evaluation', () => {
  const options = { fields: 2, background: [1, 3] };
  const parameters = { mu1: 1.1, mu2: 3.4, theta: 0.6, g: 12, c1: 0.2, c3: -1.5 };
  const x = [1.1, 3.4, 0.6, 12, 0.2, -1.5];

  it('over bins equals lib/templates in every digit', async () => {
    const bins = [
      [0.003, 0.004],
      [0.004, 0.02],
      [0.1, 0.3],
    ];
    const axis = {
      kind: 'bins',
      lo: Float64Array.from(bins, ([lo]) => lo),
      hi: Float64Array.from(bins, ([, hi]) => hi),
    } as const;
    for (const weightPower of [0, 1.5]) {
      const given = { ...options, ...(weightPower === 0 ? {} : { binWeight: weightPower }) };
      const expected = compileTemplate('locked-squeezed', given, { ...axis, weightPower }).predict(x);
      expect(await S('locked-squeezed', { options: given, parameters, bins })).toEqual([...expected]);
    }
  });

  it('at points is g Σ w κ^½ Re[C(μ) κ^iμ] + background', async () => {
    const kappa = [0.003, 0.05, 0.2];
    const weights = [Math.cos(0.6) ** 2, Math.sin(0.6) ** 2];
    const expected = kappa.map((value) => {
      const fields = [1.1, 3.4].map((mu, i) => {
        const { re, im } = squeezedCoefficient(mu, 1);
        const phase = mu * Math.log(value);
        return weights[i] * (re * Math.cos(phase) - im * Math.sin(phase));
      });
      return 12 * Math.sqrt(value) * (fields[0] + fields[1]) + 0.2 * value - 1.5 * value ** 3;
    });
    const got = await S('locked-squeezed', { options: { ...options, vertex: 1 }, parameters, kappa });
    got.forEach((value, i) => expect(value).toBeCloseTo(expected[i], 12));
  });

  it('over bins without averages is taken at √(lo·hi)', async () => {
    const body = { options: { background: [2], binAverage: false }, parameters: { c2: 1 } };
    const [value] = await S('background', { ...body, bins: [[0.04, 0.09]] });
    expect(value).toBeCloseTo(0.0036, 15);
  });

  it('of amplitude and phase equals the quadratures a = A cos φ, b = −A sin φ', async () => {
    const shared = { kappa: [0.01, 0.1], options: { fields: 1, background: [] } };
    const [A, phi] = [0.7, -2.1];
    const polar = await S('free-phase', {
      ...shared,
      options: { ...shared.options, amplitudes: 'amplitude-phase' },
      parameters: { mu1: 2, A1: A, phi1: phi },
    });
    const linear = await S('free-phase', {
      ...shared,
      parameters: { mu1: 2, a1: A * Math.cos(phi), b1: -A * Math.sin(phi) },
    });
    polar.forEach((value, i) => expect(value).toBeCloseTo(linear[i], 14));
  });

  it('of a template that is not there is 404 and says which there are', async () => {
    const error = await errorOf(await at('sawtooth', { parameters: {}, kappa: [0.1] }));
    expect(error).toMatchObject({ status: 404, code: 'not_found' });
    expect(error.message).toContain('free-phase');
  });

  const good = { options: { background: [1] }, parameters: { c1: 1 }, kappa: [0.1] };
  const bad: [string, Record<string, unknown>, string][] = [
    ['an option out of range', { options: { background: [9] } }, 'options.background[0]'],
    ['an unknown option', { options: { colour: 1 } }, 'options.colour'],
    ['averages without bins', { options: { background: [1], binAverage: true } }, 'options.binAverage'],
    ['a missing parameter', { parameters: {} }, 'parameters.c1'],
    ['an unknown parameter', { parameters: { c1: 1, mu1: 2 } }, 'parameters.mu1'],
    ['a parameter that is no number', { parameters: { c1: '1' } }, 'parameters.c1'],
    ['points and bins', { bins: [[0.1, 0.2]] }, 'kappa'],
    ['neither points nor bins', { kappa: undefined }, 'kappa'],
    ['a κ below 0', { kappa: [0.1, -0.1] }, 'kappa.1'],
    [
      'a bin of hi < lo',
      {
        kappa: undefined,
        bins: [
          [0.1, 0.2],
          [0.3, 0.2],
        ],
      },
      'bins[1]',
    ],
    ['numbers too large for the result', { parameters: { c1: 1e308 }, kappa: [1e3] }, 'parameters'],
  ];
  it.each(bad)('with %s is refused at its place', async (_, change, path) => {
    const error = await errorOf(await at('background', { ...good, ...change }));
    expect(error).toMatchObject({ status: 422, code: 'invalid' });
    expect(error.details[0].path).toBe(path);
  });

  it('of a mass outside of where the template is defined is refused', async () => {
    const error = await errorOf(
      await at('free-phase', {
        options: { background: [] },
        parameters: { mu1: 101, a1: 1, b1: 0 },
        kappa: [0.1],
      }),
    );
    expect(error).toMatchObject({ status: 422, details: [{ path: 'parameters.mu1' }] });
    expect(error.message).toContain('at most 100');
  });
});
