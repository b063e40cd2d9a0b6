import { renderToStaticMarkup } from 'react-dom/server';
import { describe, expect, it } from 'vitest';
import { BeatFigure } from '@/components/figures/beat-figure';
import { ConvergenceSpark } from '@/components/figures/convergence-spark';
import { CornerFigure } from '@/components/figures/corner-figure';
import { NumbersTable } from '@/components/figures/numbers-table';
import { PointsFigure, type PointsFigureProps } from '@/components/figures/points-figure';
import { pointsNumbers } from '@/components/figures/points-numbers';
import { PriorSketch } from '@/components/figures/prior-sketch';
import { TraceFigure } from '@/components/figures/trace-figure';
import { WithheldFigure } from '@/components/figures/withheld-figure';
import { toCsv } from '@/lib/figures/csv';
import { normalPairs } from '../lib/figures/normal-pairs';

const points = {
  kappa: [0.01, 0.03, 0.1],
  value: [1, -2, 0.5],
  error: [0.5, 0.4, 0.3],
  lo: [0.005, 0.02, 0.06],
  hi: [0.02, 0.06, 0.2],
};

const facts: PointsFigureProps = {
  number: 2,
  caption: 'Prediction over 3 measured bins.',
  label: 'Measured squeezed bispectrum with the prediction',
  fileName: 'template',
  points,
  curves: [{ role: 'sum', label: 'sum and background', kappa: [0.01, 0.1], y: [0, 2] }],
  residuals: [2, -5, 0],
};

describe('a figure', () => {
  it('has an accessible name, a numbered caption and a Save that names it', () => {
    const html = renderToStaticMarkup(<PointsFigure {...facts} />);
    expect(html).toContain('role="img" aria-label="Measured squeezed bispectrum with the prediction"');
    expect(html).toMatch(
      /<figcaption[^>]*><span[^>]*><b>Fig. 2. <\/b>Prediction over 3 measured bins\.<\/span>/,
    );
    expect(html).toContain('aria-label="Save figure 2"');
    for (const way of ['SVG', 'PNG', 'Numbers (CSV)', 'Numbers here'])
      expect(html).toContain(`>${way}</button>`);
  });

  it('is drawn on the server already: points with errors, residuals, curve and axes', () => {
    const html = renderToStaticMarkup(<PointsFigure {...facts} />);
    // Three points and three residuals, of which that of −5 standard deviations lies open at the edge.
    expect(html.match(/<circle[^>]*class="recharts-dot pt"/g)).toHaveLength(5);
    expect(html.match(/<circle[^>]*class="recharts-dot pt out"/g)).toHaveLength(1);
    expect(html.match(/class="err"/g)).toHaveLength(3);
    expect(html).toMatch(/<path class="sum" clip-path="[^"]+" d="M[\d.]+ [\d.]+L/);
    expect(html.match(/class="[^"]*\bax"/g)).toHaveLength(4);
  });

  it('keeps its height from the first byte on, on both widths', () => {
    const html = renderToStaticMarkup(<PointsFigure {...facts} />);
    const [, wide] = /--height:(\d+)px/.exec(html) ?? [];
    const [, narrow] = /--height-narrow:(\d+)px/.exec(html) ?? [];
    expect(Number(wide) % 7).toBe(0);
    expect(Number(narrow) % 7).toBe(0);
  });

  it('offers no Save where it may not be saved', () => {
    const html = renderToStaticMarkup(<PointsFigure {...facts} save={false} />);
    expect(html).not.toContain('Save');
  });

  it('that is withheld says so in its name and in words, and holds nothing to save', () => {
    const html = renderToStaticMarkup(
      <WithheldFigure number={4} caption="Limit on A." label="Limit on A against mass" />,
    );
    expect(html).toContain('aria-label="Limit on A against mass: withheld while blind"');
    expect(html).toContain('>withheld while blind</text>');
    expect(html).not.toContain('Save');
  });

  it('of the sign-in page is drawn on the server already', () => {
    const html = renderToStaticMarkup(<BeatFigure />);
    expect(html).toContain('aria-label="Two close frequencies and the beat they make"');
    expect(html).toMatch(/<path class="sum" d="M96 240L/);
  });
});

describe('the numbers behind the points', () => {
  it('hold bins, values, errors, residuals and each curve at the points', () => {
    expect(toCsv(pointsNumbers(facts))).toBe(
      [
        'kappa_lo,kappa_hi,kappa,S,standard_error,residual_sd,sum and background',
        '0.005,0.02,0.01,1,0.5,2,0',
        `0.02,0.06,0.03,-2,0.4,-5,${2 * (Math.log(0.03 / 0.01) / Math.log(0.1 / 0.01))}`,
        '0.06,0.2,0.1,0.5,0.3,0,2',
        '',
      ].join('\n'),
    );
  });

  it('leave a curve empty where it does not reach', () => {
    const { rows } = pointsNumbers({
      ...facts,
      residuals: undefined,
      curves: [{ ...facts.curves![0], kappa: [0.02, 0.05] }],
    });
    expect(rows.map((row) => row.at(-1) === null)).toEqual([true, false, true]);
  });

  it('name the ends of a band', () => {
    const band = { kappa: [0.01, 0.1], lo95: [-2, -2], lo68: [-1, -1], hi68: [1, 1], hi95: [2, 2] };
    const { columns, rows } = pointsNumbers({
      ...facts,
      points: undefined,
      residuals: undefined,
      curves: [],
      band,
    });
    expect(columns).toEqual(['kappa', 'lo95', 'lo68', 'hi68', 'hi95']);
    expect(rows[0]).toEqual([0.01, -2, -1, 1, 2]);
  });
});

const parameters = ['μ1', 'μ2', 'θ', 'A', 'φ1', 'φ2'].map((name, i) => ({
  name,
  symbol: { base: name[0], sub: name.slice(1) },
  label: `quantity ${i + 1}`,
  field: i < 2 ? i : null,
}));

describe('the corner view', () => {
  const draws = parameters.map((_, i) => normalPairs(2000, 0, i + 1).x.map((v) => 3.62 + 0.2 * v));
  const html = renderToStaticMarkup(
    <CornerFigure
      number={4}
      caption="Posterior of five of six parameters."
      label="Corner view of the posterior"
      fileName="corner"
      parameters={parameters}
      draws={draws}
      mcse={parameters.map(() => 0.006)}
    />,
  );

  it('shows the first five and says which may be shown', () => {
    expect(html).toContain('Shown, up to five');
    expect(html.match(/type="checkbox"/g)).toHaveLength(6);
    expect(html.match(/checked=""/g)).toHaveLength(5);
    expect(html).toMatch(
      /disabled="" aria-label="φ 2, quantity 6"|aria-label="φ 2, quantity 6"[^>]*disabled=""/,
    );
  });

  it('draws ten joint panels with both regions and five diagonals', () => {
    expect(html.match(/class="c68" d="M[^"]*Z"/g)).toHaveLength(10);
    expect(html.match(/class="c95" d="M[^"]*Z"/g)).toHaveLength(10);
    expect(html.match(/class="lead"/g)).toHaveLength(5);
  });

  it('gives a density the colour and dash of its field, ink to what belongs to none', () => {
    expect(html.match(/class="ln f1"/g)).toHaveLength(1);
    expect(html.match(/class="ln f2"/g)).toHaveLength(1);
    expect(html.match(/class="sum"/g)).toHaveLength(3);
  });

  it('writes median and interval with the digits that the Monte Carlo error allows', () => {
    expect(html).toContain('>3.6</text>');
    expect(html).toContain('>+0.2</text>');
    expect(html).toContain('>−0.2</text>');
  });
});

describe('the corner view of simulated data with samples laid over', () => {
  const draws = parameters.map((_, i) => normalPairs(2000, 0, i + 1).x);
  const html = renderToStaticMarkup(
    <CornerFigure
      number={4}
      caption="Posterior."
      label="Corner view"
      fileName="corner"
      parameters={parameters}
      draws={draws}
      initial={['μ1', 'μ2', 'θ']}
      truth={{ μ1: 0.5, A: 1 }}
      overlay={{ label: 'other.csv', draws: [draws[3], draws[4], null, null, null, null] }}
    />,
  );

  it('draws what was put in on its diagonal and in each panel of its parameter', () => {
    // μ 1: its diagonal, and one line in each of the two panels below it; A isn't shown.
    expect(html.match(/class="truth" d="M[\d.]+ [\d.]+v/g)).toHaveLength(3);
    expect(html).toContain('>put in</text>');
  });

  it('draws the samples where both parameters are known, and names them', () => {
    expect(html.match(/<path class="over" d="M[^"]*Z"/g)).toHaveLength(1);
    expect(html.match(/<path class="over wide" d="M[^"]*Z"/g)).toHaveLength(1);
    expect(html).toContain('>other.csv</text>');
  });
});

describe('small figures', () => {
  it('have names and draw the gate and the last value', () => {
    const html = renderToStaticMarkup(
      <ConvergenceSpark
        draws={[100, 200]}
        values={[1.1, 1.01]}
        threshold={1.01}
        scale="rhat"
        total={400}
        label="R-hat of μ 1 against draws"
      />,
    );
    expect(html).toContain('aria-label="R-hat of μ 1 against draws"');
    // (log10(0.01) + 3) / 2.5 = 0.4 of 28 px above 31: the last value lies on the gate.
    expect(html).toContain('class="thr" d="M0 19.8H150"');
    expect(html).toMatch(/<circle class="pt" cx="75.0" cy="19.8"/);
  });

  it('draw a prior in its field’s line over a hairline', () => {
    const html = renderToStaticMarkup(
      <PriorSketch x={[1, 2, 3]} density={[0, 1, 0]} field={1} label="Prior of μ 2" />,
    );
    expect(html).toContain('class="ln f2" d="M0 33.5L60 3L120 33.5"');
    expect(html).toContain('aria-label="Prior of μ 2"');
  });

  it('draw traces on the server already, one line a replica, with axes and warm-up', () => {
    const html = renderToStaticMarkup(
      <TraceFigure
        number={3}
        caption="Both masses."
        label="Traces of two replicas"
        fileName="traces"
        traces={[
          {
            symbol: { base: 'μ', sub: '1' },
            field: 0,
            replicas: [
              [1, 2],
              [2, 1],
            ],
          },
        ]}
        warmup={1}
      />,
    );
    expect(html).toContain('aria-label="Traces of two replicas"');
    expect(html).toContain('<b>Fig. 3. </b>Both masses.');
    expect(html.match(/<path class="tr f1" d="M[^"]+L[^"]+"/g)).toHaveLength(2);
    expect(html.match(/class="[^"]*\bax"/g)).toHaveLength(2);
    expect(html).toContain('>warm-up</text>');
  });
});

describe('the numbers of a figure as a table', () => {
  const cells = (html: string) => html.match(/<t[dh][ >]/g)?.length ?? 0;
  const square = (size: number) => ({
    columns: ['kappa', ...Array.from({ length: size }, (_, j) => `r${j + 1}`)],
    rows: Array.from({ length: size }, (_, i) => [i / 8, ...Array.from({ length: size }, (_, j) => -i * j)]),
  });

  it('shows all of a short one, with true minus signs, and says nothing of a rest', () => {
    const html = renderToStaticMarkup(<NumbersTable numbers={() => square(3)} label="r" />);
    expect(cells(html)).toBe(4 * 4);
    expect(html).toContain('>−4</td>');
    expect(html).not.toContain('The first');
  });

  it('of 500 bins against 500 makes 2 020 cells and no more, and says where the rest is', () => {
    const html = renderToStaticMarkup(<NumbersTable numbers={() => square(500)} label="r" />);
    expect(cells(html)).toBe(20 + 100 * 20);
    expect(html).toContain(
      'The first 100 of 500 rows and 20 of 501 columns; “Numbers (CSV)” holds all of them.',
    );
  });
});
