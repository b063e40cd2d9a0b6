import type { Fit, Measurement, Notebook, Scan, Trials } from '@/lib/schemas';

/** A measurement of four bins with edges and a diagonal covariance. */
export function measurementFixture(change: Partial<Measurement> = {}): Measurement {
  const edges = [0.01, 0.02, 0.04, 0.08, 0.16];
  const kappa = edges.slice(1).map((hi, i) => Math.sqrt(hi * edges[i]));
  const sigma = [0.1, 0.1, 0.2, 0.2];
  return {
    id: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b01',
    groupId: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b02',
    name: 'Four bins',
    description: '',
    version: 1,
    blind: false,
    simulated: true,
    rows: 4,
    kappaMin: 0.01,
    kappaMax: 0.16,
    uploadedBy: 'analyst@demo.beatnote.example',
    uploadedAt: '2027-03-10T15:02:00.000Z',
    sha256: 'a'.repeat(64),
    hasBinEdges: true,
    spectrum: null,
    truth: null,
    covarianceSource: 'mocks',
    mockCount: 200,
    notebooks: 0,
    newest: 1,
    versions: [],
    resting: [],
    files: [{ part: 'file', fileName: 'four.csv', bytes: 300, sha256: 'a'.repeat(64) }],
    checks: [],
    points: {
      kappa,
      kappaLo: edges.slice(0, 4),
      kappaHi: edges.slice(1),
      S: [0.1, -0.1, 0.3, -0.4],
      sigma,
    },
    theory: null,
    covariance: sigma.map((s, i) => sigma.map((_, j) => (i === j ? s * s : 0))),
    may: ['measurement.read', 'notebook.create'],
    ...change,
  };
}

export function notebookFixture(change: Partial<Notebook> = {}): Notebook {
  return {
    id: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b03',
    number: 7,
    groupId: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b02',
    groupName: 'Demo group',
    title: 'Two fields',
    revision: 2,
    blind: false,
    simulated: true,
    measurement: { id: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b01', name: 'Four bins', version: 1, newest: 1 },
    cuts: {},
    bins: { kept: 4, all: 4 },
    also: [],
    sharedMocks: false,
    likelihood: { kind: 'matched-t' },
    template: { id: 'free-phase', version: 1, options: { fields: 1, background: [1], binAverage: true } },
    priors: {},
    statement: '',
    record: [
      {
        revision: 1,
        by: 'analyst@demo.beatnote.example',
        at: '2027-03-10T15:00:00.000Z',
        sections: ['title', 'measurement', 'template', 'priors'],
        restoredFrom: null,
      },
      {
        revision: 2,
        by: 'lead@demo.beatnote.example',
        at: '2027-03-10T15:10:00.000Z',
        sections: ['title'],
        restoredFrom: null,
      },
    ],
    fits: [],
    createdBy: 'analyst@demo.beatnote.example',
    createdAt: '2027-03-10T15:00:00.000Z',
    origin: null,
    archived: null,
    may: ['notebook.read', 'notebook.edit', 'fit.start'],
    ...change,
  };
}

type Diagnostic = Fit['diagnostics'][number];

export function diagnosticFixture(parameter: string, change: Partial<Diagnostic> = {}): Diagnostic {
  return {
    parameter,
    derived: false,
    mean: 3.6,
    sd: 0.2,
    q2_5: 3.2,
    q16: 3.4,
    q50: 3.6,
    q84: 3.8,
    q97_5: 4,
    rhat: 1.002,
    essBulk: 900,
    essTail: 800,
    mcseMean: 0.006,
    mcseSd: 0.004,
    ...change,
  };
}

export function fitFixture(change: Partial<Fit> = {}): Fit {
  const template = { id: 'free-phase', version: 1, options: { fields: 1, background: [1] } };
  return {
    id: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b04',
    notebookId: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b03',
    number: 4,
    revision: 2,
    status: 'sampling',
    message: null,
    progress: {
      warmup: 1500,
      warmupTotal: 1500,
      draws: 1000,
      maxDraws: 3000,
      fraction: 0.41,
      secondsLeft: 41,
      secondsSpent: 60,
    },
    queue: null,
    replicas: 4,
    drawsPerSecond: 41200,
    acceptance: [
      { move: 'spectral-jump', rate: 0.57, share: 0.6 },
      { move: 'random walk', rate: 0.21, share: 0.1 },
      { move: 'random walk of mu1', rate: 0.44, share: 0.1 },
      { move: 'differential evolution', rate: 0.05, share: 0.1 },
      { move: 'swaps', rate: 0.62, share: 0.1 },
      { move: 'jumps on the ladder', rate: 0.1, share: 0 },
      { move: 'walks on the ladder', rate: 0.24, share: 0 },
    ],
    ladder: { rungs: 14, roundTrips: 3, rests: true },
    diagnostics: [diagnosticFixture('mu1'), diagnosticFixture('a1', { essTail: 300 })],
    history: [{ draws: 1000, rhat: [1.002, 1.002], ess: [800, 300] }],
    modes: [],
    modesOf: null,
    logEvidence: null,
    noEvidence: 'its error has fewer than 15 degrees of freedom yet: let the fit run on',
    gate: { met: false, target: { rhat: 1.01, ess: 400 }, reasons: [] },
    snapshot: {
      inputs: [],
      measurementVersion: 1,
      mapping: {},
      cuts: {},
      likelihood: { kind: 'matched-t' },
      mockCount: 200,
      template,
      priors: { c1: { kind: 'fixed', value: 2 } },
      seed: '20270310',
      replicas: 4,
      warmup: 1500,
      blockDraws: 500,
      program: '0.1.0',
      node: '20.20.2',
      architecture: 'x64',
      sha256: '9c41f0a7'.padEnd(64, '0'),
    },
    startedBy: 'analyst@demo.beatnote.example',
    createdAt: '2027-03-10T14:03:00.000Z',
    startedAt: '2027-03-10T14:03:01.000Z',
    endedAt: null,
    committedAt: '2027-03-10T14:04:00.000Z',
    may: ['fit.read', 'fit.stop', 'fit.extend'],
    ...change,
  };
}

/** A scan of `notebookFixture` that has ended. */
export function scanFixture(change: Partial<Scan> = {}): Scan {
  const { cuts, likelihood, template, priors, measurement } = notebookFixture();
  return {
    id: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b07',
    notebookId: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b03',
    number: 1,
    status: 'done',
    message: null,
    progress: 1,
    blind: false,
    request: {
      inputs: ['a'.repeat(64)],
      measurementVersion: measurement.version,
      cuts,
      likelihood,
      mockCount: null,
      template,
      priors,
      muMin: 0.5,
      muMax: 8,
      nulls: 1000,
      program: 'test',
      sha256: 'b'.repeat(64),
    },
    startedBy: 'analyst@demo.beatnote.example',
    createdAt: '2027-03-10T16:00:00.000Z',
    endedAt: '2027-03-10T16:00:04.000Z',
    mu: [0.5, 2.4, 8],
    deltaChi2: [1, 13.4, 2],
    logEvidence: [-10, -5, -11],
    backgroundLogEvidence: -9,
    best: { mu: 2.4, deltaChi2: 13.4, parameters: { mu1: 2.4, a1: 0.1, b1: 0.2, c1: 0.3 } },
    localP: 0.00123,
    freedom: 2,
    globalP: 36 / 1001,
    nulls: 1000,
    globalPUpcrossing: 0.0351,
    thresholds: [{ p: 0.05, deltaChi2: 12.1 }],
    aliases: [6.66],
    coverage: { length: 2.77, resolution: 2.27, spacing: 0.69, nyquist: 4.53 },
    window: { mu: [0, 1], power: [1, 0.5] },
    plane: null,
    ...change,
  };
}

export function trialsFixture(change: Partial<Trials> = {}): Trials {
  const { id, number, status, request, startedBy, createdAt, localP, globalP } = scanFixture();
  return {
    trials: [
      {
        scan: id,
        number,
        kind: 'one',
        status,
        template: request.template,
        cuts: request.cuts,
        measurementVersion: 1,
        muMin: request.muMin,
        muMax: request.muMax,
        nulls: request.nulls,
        best: [2.4],
        deltaChi2: 13.4,
        localP,
        globalP,
        shared: true,
        by: startedBy,
        at: createdAt,
      },
    ],
    smallestP: globalP,
    globalP,
    nulls: request.nulls,
    method: 'none',
    statement: 'One look for a signal was made, so there is nothing to correct for.',
    ...change,
  };
}
