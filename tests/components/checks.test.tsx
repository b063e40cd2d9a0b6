import { renderToStaticMarkup } from 'react-dom/server';
import { describe, expect, it } from 'vitest';
import { CheckResult } from '@/components/checks/check-result';
import { checksSentence, checksState, progressWords } from '@/components/checks/check-words';
import { ChecksSection } from '@/components/checks/checks-section';
import { bandHalfWidth, noiseWords } from '@/components/checks/result-words';
import { sectionIds } from '@/components/notebook/sections';
import { summariseCalibration } from '@/lib/inference/calibration';
import type { CalibrationResult, CheckListed, NotebookCheck } from '@/lib/schemas';
import { notebookFixture } from './fixtures';

const text = (node: React.ReactNode) =>
  renderToStaticMarkup(node)
    .replace(/<[^>]+>/g, '')
    .replace(/[\s\u202f\u00a0]+/g, ' ');

const notebook = notebookFixture({ may: ['notebook.read', 'check.read', 'check.start', 'check.stop'] });

function checkFixture(change: Partial<CheckListed> = {}): CheckListed {
  const { cuts, likelihood, template, priors, measurement } = notebook;
  return {
    id: '7f2b6c0e-3a53-4b6a-9d8c-0d6f2f7a1b11',
    notebookId: notebook.id,
    number: 1,
    kind: 'calibration',
    status: 'done',
    message: null,
    done: 200,
    progress: 1,
    secondsLeft: null,
    stopRequested: false,
    revision: 1,
    request: {
      kind: 'calibration',
      inputs: [],
      measurementVersion: measurement.version,
      cuts,
      likelihood,
      mockCount: null,
      template,
      priors,
      datasets: 200,
      draws: 99,
      seed: 1,
      warmup: 200,
      sampler: 3,
      program: 'test',
      sha256: 'c'.repeat(64),
    },
    calibrated: true,
    verdict: 'Calibrated.',
    startedBy: 'analyst@demo.beatnote.example',
    createdAt: '2027-03-10T16:00:00.000Z',
    endedAt: '2027-03-10T16:02:00.000Z',
    ...change,
  };
}

/** Ranks of mu1 as they are given, those of the log-likelihood uniform. */
function foundFixture(rank: (k: number) => number): NotebookCheck {
  const found = Array.from({ length: 200 }, (_, k) => ({
    ranks: { 'log likelihood': k % 100, mu1: rank(k) },
    covered: { mu1: rank(k) > 2 && rank(k) < 97 ? 1 + (k % 4) : 0 },
    made: 400 + (k % 3),
    ess: 205,
    reached: true,
  }));
  const ranks = { 'log likelihood': [], mu1: [] };
  const result: CalibrationResult = { ...summariseCalibration(found, 99), ranks };
  return { ...checkFixture({ calibrated: result.calibrated }), result };
}

const handleOf = (checks: CheckListed[], found: NotebookCheck | null = null) => ({
  checks,
  shown: checks.at(-1) ?? null,
  found,
  busy: null,
  error: null,
  start: () => Promise.resolve(),
  stop: () => Promise.resolve(),
  show: () => undefined,
});

const section = (checks: CheckListed[], of = notebook) =>
  text(
    <ChecksSection
      notebook={of}
      handle={handleOf(checks)}
      unsaved={[]}
      fold={{ state: 'open', onToggle: () => undefined }}
    />,
  );

describe('the section of checks', () => {
  it('stands between the comparison and the statement', () => {
    expect(sectionIds.slice(-3)).toEqual(['comparison', 'checks', 'statement']);
  });

  it('offers the command to who may give it, and says so where nothing was checked', () => {
    expect(section([])).toContain('Check the calibration');
    const reader = section([], notebookFixture({ may: ['notebook.read'] }));
    expect(reader).not.toContain('Check the calibration');
    expect(reader).toContain('None was made yet.');
  });

  it('says how far a check is, with the time left and a way to stop it', () => {
    const running = checkFixture({
      status: 'running',
      done: 50,
      progress: 0.25,
      secondsLeft: 44,
      calibrated: null,
      verdict: null,
    });
    const words = section([running]);
    expect(words).toContain('Check 1: 50 of 200 simulated data sets ranked, 25 %, about 40 s left.');
    expect(words).toContain('Stop the check');
    expect(words).toContain('A check is under way.');
    expect(progressWords({ ...running, stopRequested: true })).toContain(
      'stops after the data sets under way',
    );
    const waiting = { ...running, message: 'Second in the queue; those before it begin first.' };
    expect(progressWords(waiting)).toMatch(/^Check 1 has 50 of 200 .* Second in the queue/);
  });

  it('says why one failed, what a stopped one keeps, and that an old one is of another revision', () => {
    expect(section([checkFixture({ status: 'failed', message: 'Too many mocks.' })])).toContain(
      'Too many mocks. What was ranked before stays',
    );
    expect(section([checkFixture({ status: 'stopped', done: 15 })])).toContain('stopped after 15 of 200');
    const recut = notebookFixture({ cuts: { kappaMax: 0.1 } });
    expect(section([checkFixture()], recut)).toContain('it says nothing of the posterior as it is set now');
    expect(section([checkFixture()])).not.toContain('it says nothing of the posterior');
  });

  it('has a state and a sentence for the contents list', () => {
    const stateOf = (change: Partial<CheckListed>, of = notebook) =>
      checksState(handleOf([checkFixture(change)]), of);
    expect(checksState(handleOf([]), notebook)).toEqual({ kind: 'wait', word: 'not checked' });
    expect(stateOf({})).toEqual({ kind: 'ok', word: 'calibrated' });
    expect(stateOf({ calibrated: false })).toEqual({ kind: 'warn', word: 'not calibrated' });
    expect(stateOf({ status: 'queued' }).word).toBe('waits its turn');
    expect(stateOf({ status: 'running' }).word).toBe('checking');
    expect(stateOf({}, notebookFixture({ cuts: { kappaMax: 0.1 } }))).toEqual({
      kind: 'old',
      word: 'of revision 1',
    });
    expect(checksSentence(handleOf([checkFixture({ calibrated: false })]))).toBe(
      'Ranks leave their band: not calibrated, over 200 simulated data sets.',
    );
  });
});

describe('what a check found', () => {
  it('is told with its figures, the coverage that so many draws can have, and its limits', () => {
    const words = text(<CheckResult check={foundFixture((k) => k % 100)} />);
    expect(words).toContain('Calibrated within the band: the ranks of all 2 quantities');
    expect(words).toContain('then on average 401 and at most 402');
    expect(words).toContain('From 99 draws an interval of 95 % holds 93.1 %');
    expect(words).toContain('can’t show here');
    expect(words).toMatch(/more than 1\d percentage points away/);
  });

  it('names the quantity that leaves its band, in words, and where coverage is low', () => {
    const words = text(<CheckResult check={foundFixture((k) => (k % 2 ? k % 8 : 99 - (k % 8)))} />);
    expect(words).toContain('Posterior too narrow in μ1: U-shaped ranks');
    expect(words).toContain('points mark where one leaves it');
    expect(words).toMatch(/\d low/);
    const panel = renderToStaticMarkup(<CheckResult check={foundFixture((k) => (k % 2 ? 0 : 99))} />);
    expect(panel).toContain('too narrow</text>');
    expect(panel.match(/class="pt"/g)?.length).toBeGreaterThan(4);
  });

  it('says which noise was drawn for each likelihood, and why ranks are then uniform', () => {
    const of = (kind: CheckListed['request']['likelihood']['kind'], mockCount: number | null) =>
      noiseWords({ likelihood: { kind }, mockCount }).replace(/[\u202f\u00a0]/g, ' ');
    expect(of('normal', null)).toContain('covariance as it was given');
    expect(of('hartlap', 40)).toContain('40 mocks divided by Hartlap’s factor');
    for (const kind of ['matched-t', 'sellentin-heavens'] as const) {
      expect(of(kind, 40)).toMatch(/multivariate t .* 40 mocks kept as it stands.*ranks have to be uniform/);
    }
  });

  it('tells the half-width of the band in the middle', () => {
    const band = { lower: [1, 40, 90], upper: [9, 60, 99] };
    expect(bandHalfWidth({ band, datasets: 100 })).toBe(0.1);
  });
});
