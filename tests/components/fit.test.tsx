import { renderToStaticMarkup } from 'react-dom/server';
import { describe, expect, it } from 'vitest';
import { bestIndex, byReplica, drawValues, keptColumn, someKept, unpackDraws } from '@/components/fit/draws';
import { acceptanceInWords, announcement, doneShare, gateSentence } from '@/components/fit/live-figures';
import { MarginalTable } from '@/components/fit/marginal-table';
import { ModesTable } from '@/components/fit/modes-table';
import { evidenceSentence, ladderSentence, MovesTable } from '@/components/fit/moves-table';
import { fixedValues, posteriorSentence } from '@/components/fit/posterior-figures';
import { judged, meetsGate, quantitiesOf } from '@/components/fit/quantities';
import type { Draws } from '@/lib/schemas';
import { diagnosticFixture, fitFixture } from './fixtures';

const draws: Draws = {
  replicas: 2,
  stride: 1,
  replica: [0, 0, 0, 1, 1, 1],
  draw: [0, 1, 2, 0, 1, 2],
  warmup: [1, 0, 0, 1, 0, 0],
  logLikelihood: [9, -3, -1, 8, -2, -4],
  columns: { mu1: [1, 2, 3, 4, 5, 6] },
};

describe('draws for figures', () => {
  it('come by replica with their warm-up, and without it where they are the posterior', () => {
    expect(byReplica(draws, 'mu1')).toEqual([
      [1, 2, 3],
      [4, 5, 6],
    ]);
    expect([...keptColumn(draws, 'mu1')]).toEqual([2, 3, 5, 6]);
  });

  it('have their best among the kept ones: a higher likelihood in warm-up doesn’t count', () => {
    expect(bestIndex(draws)).toBe(2);
    expect(drawValues(draws, 2, { c1: 2 })).toEqual({ mu1: 3, c1: 2 });
    expect(bestIndex({ ...draws, warmup: [1, 1, 1, 1, 1, 1] })).toBe(-1);
  });

  it('are picked evenly over all replicas', () => {
    expect(someKept(draws, 2)).toEqual([1, 4]);
    expect(someKept(draws, 100)).toEqual([1, 2, 4, 5]);
  });
});

describe('the gate', () => {
  const target = { rhat: 1.01, ess: 400 };

  it('asks for R-hat below and both effective sample sizes above', () => {
    expect(meetsGate(diagnosticFixture('mu1'), target)).toBe(true);
    expect(meetsGate(diagnosticFixture('mu1', { rhat: 1.01 }), target)).toBe(false);
    expect(meetsGate(diagnosticFixture('mu1', { essTail: 400 }), target)).toBe(false);
    expect(meetsGate(diagnosticFixture('mu1', { rhat: null }), target)).toBe(false);
  });

  it('isn’t asked of a derived quantity that never varies', () => {
    expect(
      judged([diagnosticFixture('mu1'), diagnosticFixture('w1', { derived: true, sd: 0 })]),
    ).toHaveLength(1);
  });

  it('is told in a sentence made from the diagnostics', () => {
    expect(gateSentence(fitFixture())).toBe(
      'One of two quantities meets the gate: R-hat below 1.01, bulk and tail effective sample size above 400.',
    );
    const empty = fitFixture({ progress: { ...fitFixture().progress, draws: 0 } });
    expect(gateSentence(empty)).toMatch(/^No draw is kept yet\./);
  });
});

describe('a running fit', () => {
  it('is announced at tenths, not at each draw', () => {
    const at = (fraction: number) =>
      announcement(fitFixture({ progress: { ...fitFixture().progress, fraction } }));
    expect(at(0.41)).toBe('Fit 4, 4 tenths done.');
    expect(at(0.49)).toBe(at(0.41));
    expect(at(0.5)).not.toBe(at(0.49));
    expect(at(0.05)).toBe('');
    expect(announcement(fitFixture({ status: 'converged' }))).toBe('');
  });

  it('shows its warm-up’s own way until the first draw is kept', () => {
    const progress = { ...fitFixture().progress, warmup: 300, draws: 0, fraction: 0 };
    expect(doneShare(fitFixture({ status: 'warming-up', progress }))).toBeCloseTo(0.2, 12);
    expect(doneShare(fitFixture())).toBe(0.41);
  });

  it('tells the acceptance of jumps and of whole walks, not of each block', () => {
    expect(acceptanceInWords(fitFixture().acceptance)).toEqual({
      label: 'acceptance, jumps and walks',
      value: '0.57, 0.21',
    });
    expect(acceptanceInWords([]).value).toBe('–');
  });
});

describe('the moves', () => {
  const table = (change = {}) =>
    renderToStaticMarkup(<MovesTable fit={fitFixture(change)} quantities={new Map()} />);

  it('are told each with its acceptance and its share of the time', () => {
    const markup = table();
    for (const text of ['jump between modes', '0.57', '60', 'walks at higher temperatures', 'with swaps']) {
      expect(markup).toContain(text);
    }
  });

  it('come with what the ladder did', () => {
    expect(ladderSentence({ rungs: 14, roundTrips: 3, rests: true })).toMatch(
      /14 temperatures; points went down to the prior and back three times\. It is advanced seldom/,
    );
    expect(ladderSentence({ rungs: 9, roundTrips: 0, rests: false })).toMatch(/no point has yet gone down/);
    expect(ladderSentence(null)).toBeNull();
  });

  it('and with the evidence, or why it has no value', () => {
    const logEvidence = { value: 77.09432, error: 0.0021, dof: 123 };
    expect(evidenceSentence({ logEvidence, noEvidence: null })).toMatch(/^ln evidence 77\.09\d* ± 0\.002/);
    expect(table()).toContain('no value, because its error has fewer than 15 degrees of freedom yet');
    const exact = { value: -2.5, error: 1e-8, dof: 1e6 };
    expect(evidenceSentence({ logEvidence: exact, noEvidence: null })).toMatch(/exact/);
  });
});

describe('the posterior', () => {
  it('says whose draws it is made of and whether they met the gate', () => {
    expect(posteriorSentence(fitFixture({ status: 'converged' }))).toBe(
      'From 4\u202f000 kept draws of four replicas of fit 4, which has met the gate.',
    );
    expect(posteriorSentence(fitFixture())).toMatch(/its numbers move/);
  });

  it('fills fixed parameters in from the snapshot', () => {
    expect(fixedValues(fitFixture())).toEqual({ c1: 2 });
  });

  it('shows no digit finer than twice its Monte Carlo error', () => {
    const quantities = quantitiesOf({ id: 'free-phase', options: { fields: 1, background: [1] } });
    const fit = fitFixture({
      diagnostics: [diagnosticFixture('mu1', { q50: 3.5987654, mcseMean: 0.006 })],
    });
    const html = renderToStaticMarkup(<MarginalTable fit={fit} quantities={quantities} number={2} />);
    // Twice the error of the median is 0.015, so a hundredth would be too fine.
    expect(html).toContain('>3.6<');
    expect(html).not.toContain('3.59');
  });

  it('says what was put into simulated data and how far away the median lies', () => {
    const quantities = quantitiesOf({ id: 'free-phase', options: { fields: 1, background: [1] } });
    const fit = fitFixture({
      diagnostics: [diagnosticFixture('mu1', { q50: 3.5, sd: 0.25, mcseMean: 0.001 })],
    });
    const html = renderToStaticMarkup(
      <MarginalTable fit={fit} quantities={quantities} number={2} truth={{ mu1: 3 }} />,
    );
    expect(html).toContain('>put in<');
    expect(html).toContain('>+2.0 sd<');
    const without = renderToStaticMarkup(<MarginalTable fit={fit} quantities={quantities} number={2} />);
    expect(without).not.toContain('put in');
  });

  it('gives no value where the draws are too weak, and says why', () => {
    const quantities = quantitiesOf({ id: 'free-phase', options: { fields: 1, background: [1] } });
    const fit = fitFixture({ diagnostics: [diagnosticFixture('mu1', { mcseMean: null })] });
    const html = renderToStaticMarkup(<MarginalTable fit={fit} quantities={quantities} number={2} />);
    expect(html).toContain('>no value<');
    expect(html).toMatch(/: no value, because the replicas are too short/);
  });
});

describe('packed draws', () => {
  const head = { replicas: 2, stride: 4, warmup: 8, rows: [2, 1], columns: ['mu1'] };
  const draw = [4, 8, 8];
  const reals = [-1, -2, -3, 0.5, 1.5, 2.5];
  const text = JSON.stringify(head);
  const padded = new TextEncoder().encode(text.padEnd(4 * Math.ceil(text.length / 4)));
  const bytes = new Uint8Array(4 + padded.length + 4 * (draw.length + reals.length));
  new DataView(bytes.buffer).setUint32(0, padded.length, true);
  bytes.set(padded, 4);
  bytes.set(new Uint8Array(Uint32Array.from(draw).buffer), 4 + padded.length);
  bytes.set(new Uint8Array(Float32Array.from(reals).buffer), 4 + padded.length + 4 * draw.length);

  it('are read with their replicas, warm-up and columns', () => {
    const read = unpackDraws(bytes.buffer);
    expect(Array.from(read.replica)).toEqual([0, 0, 1]);
    expect(Array.from(read.warmup)).toEqual([1, 0, 0]);
    expect(Array.from(read.logLikelihood)).toEqual([-1, -2, -3]);
    expect([...keptColumn(read, 'mu1')]).toEqual([1.5, 2.5]);
    expect(byReplica(read, 'mu1')).toEqual([[0.5, 1.5], [2.5]]);
  });

  it('are refused where bytes are missing', () => {
    expect(() => unpackDraws(bytes.buffer.slice(0, -4))).toThrow(/which isn't what their head says/);
  });
});

describe('the modes', () => {
  const mode = { mu: [2.3], lo: [0.5], hi: [11.08], weight: 0.551, mcse: 0.004, scanWeight: 0.548 };

  it('stand with their share of the draws beside that by the scan, and no value where there is none', () => {
    const modes = [mode, { ...mode, lo: [11.08], hi: [22.2], weight: 0, scanWeight: null }];
    const html = renderToStaticMarkup(
      <ModesTable fit={{ modes, modesOf: { by: 'scan', names: ['mu1'] } }} />,
    );
    expect(html).toMatch(/0\.50 to 11\.08/);
    expect(html).toMatch(/0\.551.*0\.004.*0\.548/);
    expect(html).toMatch(/11\.08 to 22\.20.*0\.000.*–/);
    expect(html).toMatch(/with a scan of their own/);
    expect(renderToStaticMarkup(<ModesTable fit={{ modes: [], modesOf: null }} />)).toBe('');
  });

  it('of three fields stand beside what an independent run found, each mass by its own symbol', () => {
    const three = { ...mode, mu: [0.4, 1.2, 3], lo: [0, 0.5, 1], hi: [1, 2, 8] };
    const names = ['nu1', 'mu2', 'mu3'];
    const html = renderToStaticMarkup(<ModesTable fit={{ modes: [three], modesOf: { by: 'run', names } }} />);
    expect(html).toMatch(/ν.*0\.00 to 1\.00.*μ.*0\.50 to 2\.00.*μ.*1\.00 to 8\.00/);
    expect(html).toMatch(/with an independent run: sixteen chains of their own/);
    expect(html).toMatch(/by the independent run/);
    expect(html).not.toMatch(/by the scan/);
  });
});
