import { createRng, type Rng } from '@/lib/sampler';
import { compileTemplate } from '@/lib/templates';

/** How the demo's invented surveys come about: a template's prediction, and noise from a fixed seed on top of it. */
export interface Simulation {
  /** Line at the head of the file of points. */
  title: string;
  seed: string;
  bins: number;
  /** Range in κ, in bins of equal width in ln κ. */
  from: number;
  to: number;
  /** Correlation of the noise from one bin to the next. */
  correlation: number;
  template: { id: string; options: Record<string, unknown> };
  /** What is put in, by parameter. */
  truth: Readonly<Record<string, number>>;
  /** Mocks that go with it; without them the covariance of the noise itself is given. */
  mocks: number | null;
}

const edgesOf = ({ bins, from, to }: Simulation): number[] =>
  Array.from({ length: bins + 1 }, (_, i) => from * (to / from) ** (i / bins));

/** Standard error of a bin: a floor, and a part that grows as √κ, as the oscillation does. */
const errorsOf = (edges: readonly number[]): number[] =>
  edges.slice(1).map((hi, i) => 0.002 + 0.055 * Math.sqrt(Math.sqrt(edges[i] * hi)));

/** One realisation of the noise: a first-order autoregression across the bins. */
function noise(rng: Rng, errors: readonly number[], correlation: number): number[] {
  let last = rng.normal();
  return errors.map((error, i) => {
    if (i > 0) last = correlation * last + Math.sqrt(1 - correlation ** 2) * rng.normal();
    return error * last;
  });
}

const digits = (value: number): string => value.toExponential(8);
const csv = (rows: readonly (readonly number[])[]): string =>
  `${rows.map((row) => row.map(digits).join(',')).join('\n')}\n`;

export interface SimulatedFiles {
  points: string;
  mocks: string | null;
  covariance: string | null;
}

/** The measurement with its mocks or its covariance, as files that a person could have made. */
export function simulate(simulation: Simulation): SimulatedFiles {
  const { title, seed, correlation, template, truth, mocks } = simulation;
  const edges = edgesOf(simulation);
  const errors = errorsOf(edges);
  const compiled = compileTemplate(template.id, template.options, {
    kind: 'bins',
    lo: Float64Array.from(edges.slice(0, -1)),
    hi: Float64Array.from(edges.slice(1)),
    weightPower: 0,
  });
  const signal = compiled.predict(compiled.parameters.map(({ name }) => truth[name]));
  const rng = createRng(seed);
  const drawn = () => noise(rng, errors, correlation).map((error, i) => signal[i] + error);
  const measured = drawn();
  const rows = measured.map((S, i) => [edges[i], edges[i + 1], S, errors[i]]);
  return {
    points: `# ${title}\nkappa_lo,kappa_hi,S,sigma_S\n${csv(rows)}`,
    mocks: mocks === null ? null : csv(Array.from({ length: mocks }, drawn)),
    covariance:
      mocks === null
        ? csv(errors.map((a, i) => errors.map((b, j) => a * b * correlation ** Math.abs(i - j))))
        : null,
  };
}
