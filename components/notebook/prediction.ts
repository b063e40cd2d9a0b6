import type { Curve } from '@/components/figures/points-figure';
import { assembleTemplate, theoryOfPart, type PartModel } from '@/lib/inference/assembled-template';
import type { CompiledTemplate } from '@/lib/templates';
import { chiSquare, dataAxis, residuals, type KeptPoints } from './kept-points';

/** A template's id with its options. */
export interface TemplateSettings {
  id: string;
  options: Record<string, unknown>;
}

/** A template compiled twice: as the likelihood has it on the bins, and at closely spaced κ for drawing. */
export interface Prediction {
  onData: CompiledTemplate;
  fine: CompiledTemplate;
  kappa: Float64Array;
  /** What is drawn through the points: the fine curve, or with a window or columns what they make of it, at the points themselves. */
  seen: { template: CompiledTemplate; kappa: Float64Array };
  points: KeptPoints;
}

/** Points of a drawn curve. */
const drawn = 241;

/** Closely spaced κ over the bins, even in ln κ. */
export function fineKappa({ lo, hi, kappa }: KeptPoints, count = drawn): Float64Array {
  const first = lo ? lo[0] : kappa[0];
  const last = hi ? hi[hi.length - 1] : kappa[kappa.length - 1];
  const step = Math.log(last / first) / (count - 1);
  return Float64Array.from({ length: count }, (_, i) => first * Math.exp(i * step));
}

/** What was compiled last on some points: several parts of a page predict with the same template. */
const compiled = new WeakMap<KeptPoints, { key: string; prediction: Prediction }>();

/** Compiles a template on these points; throws TemplateError where options or axis don't fit. */
export function compilePrediction(settings: TemplateSettings, points: KeptPoints): Prediction {
  const key = JSON.stringify([settings.id, settings.options]);
  const known = compiled.get(points);
  if (known?.key === key) return known.prediction;
  const prediction = compile(settings, points);
  compiled.set(points, { key, prediction });
  return prediction;
}

function compile({ id, options }: TemplateSettings, points: KeptPoints): Prediction {
  const kappa = fineKappa(points);
  const { window, columns } = points.theory ?? { window: null, columns: [] };
  const part: PartModel = {
    label: 'measurement',
    length: points.rows.length,
    axis: dataAxis(window ?? points, options),
    ...(window ? { window: window.matrix } : {}),
    columns,
  };
  const atPoints = { id, options: { ...options, binAverage: false } };
  const onData = assembleTemplate([part], { id, options });
  const fine = theoryOfPart([part], atPoints, 0, { kind: 'points', kappa });
  return {
    onData,
    fine,
    kappa,
    seen:
      window || columns.length > 0 ? { template: onData, kappa: points.kappa } : { template: fine, kappa },
    points,
  };
}

/** Amplitudes of each field's cosine and sine at x: S_i = κ^½ [c cos(μ ln κ) + s sin(μ ln κ)]. */
function quadratures(template: CompiledTemplate, x: ArrayLike<number>) {
  const weights = new Float64Array(template.columnCount);
  template.coefficients(x, weights);
  let at = 0;
  return template.blocks.map(({ mass, width }) => {
    const pair = { mu: x[mass], c: weights[at], s: weights[at + 1] };
    at += width;
    return pair;
  });
}

/** One field alone, without background. */
function fieldCurve(template: CompiledTemplate, x: ArrayLike<number>, field: number): Float64Array {
  const { mu, c, s } = quadratures(template, x)[field];
  const { fill, width } = template.blocks[field];
  const columns = Array.from({ length: width }, () => new Float64Array(template.length));
  fill(mu, columns);
  return columns[0].map((cosine, i) => c * cosine + s * columns[1][i]);
}

/**
 * Envelope of the beat of two fields: κ^½ |z₁ + z₂ e^{i(μ₂−μ₁) ln κ}| with z = c − i s, which the oscillating sum
 * touches and never leaves.
 */
export function beatEnvelope(
  template: CompiledTemplate,
  x: ArrayLike<number>,
  kappa: Float64Array,
): Float64Array | null {
  if (template.blocks.length !== 2) return null;
  const [first, second] = quadratures(template, x);
  return kappa.map((k) => {
    const turn = (second.mu - first.mu) * Math.log(k);
    const re = first.c + second.c * Math.cos(turn) + second.s * Math.sin(turn);
    const im = -first.s - second.s * Math.cos(turn) + second.c * Math.sin(turn);
    return Math.sqrt(k) * Math.hypot(re, im);
  });
}

/** The curves of a parameter vector: sum and background together, each field alone, the envelope of two. */
export function curvesOf({ fine, kappa, seen }: Prediction, x: ArrayLike<number>): Curve[] {
  const fields = fine.blocks.length;
  const curves: Curve[] = [
    {
      role: 'sum',
      label: fields ? (fine.fixedColumns.length ? 'sum and background' : 'sum') : 'background',
      kappa: seen.kappa,
      y: seen.template.predict(x),
    },
  ];
  for (let field = 0; field < fields; field += 1) {
    curves.push({ role: 'field', label: `field ${field + 1}`, field, kappa, y: fieldCurve(fine, x, field) });
  }
  const envelope = beatEnvelope(fine, x, kappa);
  if (envelope) {
    curves.push({
      role: 'envelope',
      label: 'envelope of the beat',
      kappa,
      y: envelope,
      yLow: envelope.map((value) => -value),
    });
  }
  return curves;
}

/** What the data say to a parameter vector. */
export function judge({ onData, points }: Prediction, x: ArrayLike<number>) {
  const predicted = onData.predict(x);
  return { chiSquare: chiSquare(points, predicted), residuals: residuals(points, predicted) };
}
