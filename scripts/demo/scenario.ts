import type { Prior } from '@/lib/templates';
import { simulate, type SimulatedFiles, type Simulation } from './simulation';

/**
 * The demo: a group and its invented Larkfield survey. Signal and noise are made up from fixed seeds; nothing in it was
 * measured, and every measurement says so.
 */

export const accounts = ['lead', 'analyst', 'referee', 'reader'] as const;
export const demoEmail = (name: string): string => `${name}@demo.beatnote.example`;
export const siteAdministrator = demoEmail('admin');
export const groupName = 'Demo group';

export interface DemoMeasurement {
  name: string;
  description: string;
  /** Name of its files, without ending. */
  fileName: string;
  truth: Simulation['truth'];
  files: () => SimulatedFiles;
}

export interface DemoNotebook {
  title: string;
  /** Name of its measurement. */
  measurement: string;
  template: { id: string; options: Record<string, unknown> };
  priors: Record<string, Prior>;
  /** Seed of its fit; a notebook without one is there to be started. */
  seed: string | null;
  statement: string | null;
}

const simulated = (
  given: Omit<DemoMeasurement, 'truth' | 'files'>,
  simulation: Simulation,
): DemoMeasurement => ({ ...given, truth: simulation.truth, files: () => simulate(simulation) });

const twoFields = {
  id: 'locked-squeezed',
  options: { fields: 2, vertex: 2, phases: 'locked', background: [1, 2] },
};
const oneFree = {
  id: 'free-phase',
  options: { fields: 1, amplitudes: 'amplitude-phase', background: [1, 2] },
};

const deep = simulated(
  {
    name: 'Larkfield deep field',
    description:
      'Two mixed heavy fields over a smooth background, in a deep and narrow field that reaches far into squeezed triangles. The masses are close, so that their oscillations beat. The covariance is estimated from 600 mocks.',
    fileName: 'larkfield-deep',
  },
  {
    title: 'Larkfield deep field, squeezed isosceles triangles, simulated',
    seed: 'demo: the two-field measurement',
    bins: 40,
    from: 0.002,
    to: 0.3,
    correlation: 0.5,
    template: twoFields,
    truth: { mu1: 1.9, mu2: 3.1, theta: 1.4, g: 1500, c1: -0.3, c2: 0.4 },
    mocks: 600,
  },
);

const wide = simulated(
  {
    name: 'Larkfield wide strip',
    description:
      'One heavy field with a phase of its own over a smooth background, in a wide and shallow strip. The covariance is that of the noise itself, given as a matrix.',
    fileName: 'larkfield-wide',
  },
  {
    title: 'Larkfield wide strip, squeezed isosceles triangles, simulated',
    seed: 'demo: the one-field measurement',
    bins: 32,
    from: 0.003,
    to: 0.25,
    correlation: 0.3,
    template: oneFree,
    truth: { mu1: 4.6, A1: 0.11, phi1: 0.8, c1: 0.15, c2: -0.3 },
    mocks: null,
  },
);

const south = simulated(
  {
    name: 'Larkfield southern cap',
    description:
      'No heavy field at all, a smooth background alone, in the shells of the southern cap. What a group most often has in its hands. The covariance is estimated from 400 mocks.',
    fileName: 'larkfield-south',
  },
  {
    title: 'Larkfield southern cap, squeezed isosceles triangles, simulated',
    seed: 'demo: the measurement of nothing',
    bins: 30,
    from: 0.003,
    to: 0.3,
    correlation: 0.4,
    template: { id: 'background', options: { background: [1, 2] } },
    truth: { c1: 0.2, c2: -0.35 },
    mocks: 400,
  },
);

/** In the order in which they are uploaded. */
export const measurements: readonly DemoMeasurement[] = [south, wide, deep];

/** The coupling's scale hangs on the masses by powers of ten, so its prior is stated: wide enough for both. */
export const beat: Pick<DemoNotebook, 'template' | 'priors'> = {
  template: twoFields,
  priors: { g: { kind: 'normal', mean: 0, sd: 2000 } },
};
export const beatMeasurement = deep;

/** In the order of their numbers. */
export const notebooks: readonly DemoNotebook[] = [
  {
    title: 'Two mixed fields in the Larkfield deep field',
    measurement: deep.name,
    ...beat,
    seed: 'larkfield deep',
    statement: `In the Larkfield deep field two oscillations in ln κ beat against each other. Two mixed fields with locked phases over a smooth background describe all {bins of fit 1} bins, with the masses μ₁ = {mu1 of fit 1} and μ₂ = {mu2 of fit 1}.

The lighter field couples with the weight w₁ = {w1 of fit 1}; the mixing angle is θ = {mean theta of fit 1} rad. The gate is {gate of fit 1}, from {draws of fit 1} kept draws.

The measurement is simulated. What was put in is μ₁ = 1.9, μ₂ = 3.1 and θ = 1.4.`,
  },
  {
    title: 'One oscillation in the Larkfield wide strip',
    measurement: wide.name,
    template: oneFree,
    priors: {},
    seed: 'larkfield wide',
    statement: null,
  },
  {
    title: 'No oscillation in the Larkfield southern cap',
    measurement: south.name,
    template: oneFree,
    priors: {},
    seed: 'larkfield south',
    statement: `In the Larkfield southern cap we find no oscillation in ln κ. Whatever the mass of a heavy field within its prior, 97.5 % of the draws leave its amplitude below A = {97.5 % A1 of fit 1}, from all {bins of fit 1} bins.

The mass itself stays open, as it has to where there is nothing to weigh: 95 % of the draws lie between μ = {95 % mu1 of fit 1}. The bound depends on the priors that section 4 prints, and holds for one field with a free phase.`,
  },
  {
    title: 'Would one field do for the Larkfield deep field?',
    measurement: deep.name,
    template: { id: 'locked-squeezed', options: { ...twoFields.options, fields: 1 } },
    priors: beat.priors,
    seed: null,
    statement: null,
  },
];
