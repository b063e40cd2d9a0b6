import { renderToStaticMarkup } from 'react-dom/server';
import { describe, expect, it } from 'vitest';
import { keepPoints, keepTogether } from '@/components/notebook/kept-points';
import { currentSection } from '@/components/notebook/section-states';
import { sectionIds, type SectionId } from '@/components/notebook/sections';
import { bestOfScan } from '@/components/scan/best-point';
import { coverageOf, isLocked, rangeOf } from '@/components/scan/coverage';
import { CoverageWords } from '@/components/scan/coverage-part';
import { Significance } from '@/components/scan/scan-result';
import { ScanSection } from '@/components/scan/scan-section';
import {
  globalWords,
  isOtherSettings,
  localReference,
  probability,
  scanSentence,
  scanState,
  trialWords,
  upcrossingWords,
  verdict,
} from '@/components/scan/scan-words';
import type { State } from '@/components/ui/state-word';
import { measurementFixture, notebookFixture, scanFixture, trialsFixture } from './fixtures';

const text = (node: React.ReactNode) =>
  renderToStaticMarkup(node)
    .replace(/<[^>]+>/g, '')
    .replace(/[\s\u202f]+/g, ' ');
const points = keepPoints(measurementFixture(), {});
const free = { id: 'free-phase', options: { fields: 1, background: [1] } };
const locked = { id: 'locked-squeezed', options: { fields: 1, background: [1] } };

describe('coverage', () => {
  // Four octaves of bins: L = ln 16, D = ln 2; by hand 2π/L = 2.266 and π/D = 4.532.
  const coverage = coverageOf(points, {})!;

  it('comes from the bins alone', () => {
    expect(coverage.facts.resolution).toBeCloseTo((2 * Math.PI) / Math.log(16), 12);
    expect(coverage.facts.nyquist).toBeCloseTo(Math.PI / Math.log(2), 12);
    expect(coverage.alias).toBeCloseTo((2 * Math.PI) / Math.log(2), 12);
    expect(coverage.window.power[0]).toBeCloseTo(1, 12);
  });

  it('is the same, with equal weights, where values and errors are withheld', () => {
    const blind = { ...points, S: points.S.map(() => NaN), sigma: points.sigma.map(() => NaN) };
    const without = coverageOf(blind, {})!;
    expect(without.facts).toEqual(coverage.facts);
    expect(without.weighted).toBe(false);
    expect(without.window.power.every(Number.isFinite)).toBe(true);
  });

  it('is that of all measurements together: from the lowest to the highest bin of any', () => {
    const [low, high] = [{ kappaMax: 0.08 }, { kappaMin: 0.04 }];
    const together = keepTogether(measurementFixture(), low, [
      { measurement: measurementFixture(), cuts: high },
    ]);
    const joint = coverageOf(together, {})!;
    expect(joint.facts.length).toBeCloseTo(coverage.facts.length, 12);
    expect(joint.bins).toBe(together.rows.length + together.together!.further[0].rows.length);
    expect(joint.window.power[0]).toBeCloseTo(1, 12);
  });

  it('is unknown for two bins', () => {
    expect(coverageOf(keepPoints(measurementFixture(), { kappaMax: 0.04 }), {})).toBeNull();
  });

  it('is told in words, with a caution where more is asked for than these bins see', () => {
    const words = text(<CoverageWords coverage={coverage} asked={[0.5, 6]} locked={false} />);
    expect(words).toContain('Four bins span ln κ by 2.77');
    expect(words).toContain('closer than 2π/2.77 = 2.27 are not told apart');
    expect(words).toContain('In reach are masses from about 2.3 to 4.5. The priors ask for 0.5 to 6.');
    expect(words).toContain('Below μ = 2.3 a field makes less than one turn');
    expect(words).toContain('Above μ = 4.5 each frequency has an alias below');
    expect(text(<CoverageWords coverage={coverage} asked={[2.5, 4]} locked={false} />)).not.toContain(
      'Caution',
    );
  });
});

describe('the range that a scan goes over', () => {
  it('is that of the priors, within the template’s own', () => {
    const uniform = { mu1: { kind: 'uniform', lo: 1, hi: 7 } } as const;
    expect(rangeOf(free, uniform)).toMatchObject({ lo: 1, hi: 7 });
    const normal = { mu1: { kind: 'normal', mean: 2, sd: 0.25 } } as const;
    // Four sds to both sides.
    expect(rangeOf(free, normal)).toMatchObject({ lo: 1, hi: 3 });
    expect(rangeOf(free, { mu1: { kind: 'fixed', value: 2 } })).toMatchObject({ lo: Infinity });
    expect(rangeOf({ id: 'background', options: { background: [1] } }, {})).toBeNull();
  });
});

describe('significance in words', () => {
  it('says how many nulls rose as high, and what so many can’t tell', () => {
    expect(globalWords(41 / 1001, 1000)).toMatch(/^p = 0\.041: 40 of 1\s000 nulls rose as high/);
    expect(globalWords(1 / 1001, 1000)).toMatch(
      /^none of 1\s000 nulls rose as high, so that p ≤ 0\.001\. A p below 1\/\(1\s000 \+ 1\) = 0\.001 can’t be told/,
    );
  });

  it('names the reference of the local p', () => {
    expect(localReference(scanFixture())).toContain('χ² with two degrees of freedom');
    const request = { ...scanFixture().request, mockCount: 600 };
    expect(localReference(scanFixture({ request }))).toMatch(/an F distribution .* from 600 mocks/);
  });

  it('is calm where nothing is found', () => {
    expect(verdict(0.4, 400)).toContain('Nothing stands out');
    expect(verdict(0.4, 400)).not.toMatch(/fail|sorry|unfortunately/i);
    expect(verdict(0.02, 20_000)).toContain('not enough by itself');
    expect(verdict(1 / 201, 200)).toContain('rarer than so few nulls can tell');
    expect(verdict(0.0005, 20_000)).toContain('hard to come by');
  });

  it('quotes upcrossings for a free phase, and for a locked one says why not', () => {
    expect(upcrossingWords(scanFixture())).toContain('p ≈ 0.035');
    expect(isLocked(free)).toBe(false);
    expect(isLocked(locked)).toBe(true);
    const request = { ...scanFixture().request, template: { ...locked, version: 1 } };
    const words = upcrossingWords(scanFixture({ request }));
    expect(words).toContain('counts too many');
    expect(words).not.toContain('0.035');
  });

  it('warns that local isn’t global, with both numbers', () => {
    const words = text(<Significance scan={scanFixture()} />);
    expect(words).toContain('μ = 2.400');
    expect(words).toContain('p = 0.0012');
    expect(words).toContain('p = 0.036');
    expect(words).toContain('The local p is not the significance of a find');
    expect(words).toContain('shows again at μ = 6.66');
  });

  it('writes a small p as a power of ten', () => {
    expect(probability(1 / 100_001)).toBe('10⁻⁵');
    expect(probability(5.2e-7)).toBe('5.2 × 10⁻⁷');
    expect(probability(0.0123)).toBe('0.012');
  });

  it('counts the looks where there is more than one', () => {
    expect(trialWords(trialsFixture())).toBe(trialsFixture().statement);
    const two = trialsFixture({ method: 'same-nulls', statement: '2 looks.', globalP: 0.071 });
    expect(trialWords(two)).toBe(
      '2 looks. The smallest p of one look alone is 0.036; counting all of them, p = 0.071.',
    );
  });
});

describe('the section', () => {
  const notebook = notebookFixture({ may: ['notebook.read', 'notebook.edit', 'scan.start'] });
  const handle = {
    trials: trialsFixture(),
    shown: scanFixture().id,
    scan: scanFixture(),
    starting: false,
    error: null,
    start: () => Promise.resolve(),
    show: () => undefined,
  };
  const section = (change: object = {}, of = notebook) =>
    text(
      <ScanSection
        notebook={of}
        points={points}
        handle={{ ...handle, ...change }}
        unsaved={[]}
        fold={{ state: 'open', onToggle: () => undefined }}
      />,
    );

  it('shows coverage without any scan, and the form', () => {
    const words = section({ trials: trialsFixture({ trials: [], globalP: null }), shown: null, scan: null });
    expect(words).toContain('What these bins can see');
    expect(words).toContain('Nulls');
    expect(words).not.toContain('Log of looks');
  });

  it('says that a blind measurement isn’t scanned, and shows coverage all the same', () => {
    const words = section({}, notebookFixture({ blind: true }));
    expect(words).toContain('Spectral window');
    expect(words).toContain('nothing is looked for in it yet');
    expect(words).not.toContain('2.400');
    expect(words).not.toContain('Global');
  });

  it('shows how far a scan is, and keeps a failed one in the log', () => {
    const running = scanFixture({ status: 'running', progress: 0.4, best: null });
    expect(section({ scan: running, starting: true })).toMatch(/40\s%\sdone/);
    const failed = trialsFixture({ trials: [{ ...trialsFixture().trials[0], status: 'failed' }] });
    const words = section({
      trials: failed,
      scan: scanFixture({ status: 'failed', message: 'Too many mocks.', best: null }),
    });
    expect(words).toContain('Too many mocks. The notebook is as it was');
    expect(words).toContain('failed');
  });

  it('has a state and a sentence, and never calls for anything', () => {
    const trials = trialsFixture();
    expect(scanState(trialsFixture({ trials: [] }), null, notebook).word).toBe('not scanned');
    expect(scanState(trials, scanFixture(), notebook)).toEqual({ kind: 'ok', word: 'scan 1' });
    expect(isOtherSettings(scanFixture().request, notebook)).toBe(false);
    const recut = notebookFixture({ cuts: { kappaMax: 0.1 } });
    expect(scanState(trials, scanFixture(), recut).kind).toBe('old');
    expect(scanState(trials, scanFixture(), notebookFixture({ blind: true })).kind).toBe('blind');
    expect(scanSentence(scanFixture(), notebook)).toBe('Scan 1: best μ = 2.400, Δχ² = 13.4, global p 0.036.');
    const settled: State = { kind: 'ok', word: 'settled' };
    const states = Object.fromEntries(sectionIds.map((id) => [id, settled])) as Record<SectionId, State>;
    expect(currentSection({ ...states, scan: { kind: 'wait', word: 'not scanned' } })).toBe('posterior');
  });
});

describe('the best point of a scan', () => {
  it('has all parameters of one field, or the two masses of the plane', () => {
    expect(bestOfScan(scanFixture())).toMatchObject({
      label: 'Best of scan 1',
      values: { mu1: 2.4, a1: 0.1, b1: 0.2, c1: 0.3 },
    });
    const plane = {
      mu: [1, 2, 3],
      deltaChi2: [],
      logEvidence: null,
      best: { mu: [1.2, 2.4], deltaChi2: 20 },
      globalP: null,
      nulls: 0,
    };
    expect(bestOfScan(scanFixture({ plane }))?.values).toEqual({ mu1: 1.2, mu2: 2.4 });
    expect(bestOfScan(scanFixture({ best: null }))).toBeNull();
  });
});
