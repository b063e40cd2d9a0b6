import type { Curve } from '@/components/figures/points-figure';
import { assembleTemplate, theoryOfPart, type PartModel } from '@/lib/inference/assembled-template';
import type { CompiledTemplate } from '@/lib/templates';
import { chiSquare, dataAxis, joinPoints, residuals, type KeptPoints } from './kept-points';

/** A template's id with its options. */
export interface TemplateSettings {
  id: string;
  options: Record<string, unknown>;
}

/** What is drawn of one measurement: its points and the template at closely spaced κ, with the parameters of all. */
export interface Panel {
  label: string;
  points: KeptPoints;
  /** First of its values among those of all. */
  from: number;
  fine: CompiledTemplate;
  kappa: Float64Array;
  /** What is drawn through the points: the fine curve, or with a window or columns what they make of it, at the points themselves. */
  seen: { template: CompiledTemplate; kappa: Float64Array };
}

/** A template compiled as the likelihood has it on the values of all measurements, and for drawing on each. */
export interface Prediction extends Panel {
  onData: CompiledTemplate;
  /** The values of all measurements, one after the other. */
  data: KeptPoints;
  /** One a measurement; what is beside it here is that of the first. */
  panels: Panel[];
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
  const measured = [points, ...(points.together?.further ?? [])];
  const labels = points.together?.labels ?? ['measurement'];
  const parts = measured.map((each, k): PartModel => {
    const { window, columns } = each.theory ?? { window: null, columns: [] };
    return {
      label: labels[k],
      length: each.rows.length,
      axis: dataAxis(window ?? each, options),
      ...(window ? { window: window.matrix } : {}),
      columns,
    };
  });
  const atPoints = { id, options: { ...options, binAverage: false } };
  const onData = assembleTemplate(parts, { id, options });
  let before = 0;
  const panels = measured.map((each, k): Panel => {
    const from = before;
    before += parts[k].length;
    const kappa = fineKappa(each);
    const fine = theoryOfPart(parts, atPoints, k, { kind: 'points', kappa });
    const { window, columns } = each.theory ?? { window: null, columns: [] };
    const own: CompiledTemplate =
      measured.length === 1
        ? onData
        : {
            ...onData,
            length: parts[k].length,
            predict: (x) => onData.predict(x).slice(from, from + parts[k].length),
          };
    return {
      label: labels[k],
      points: each,
      from,
      fine,
      kappa,
      seen: window || columns.length > 0 ? { template: own, kappa: each.kappa } : { template: fine, kappa },
    };
  });
  return { ...panels[0], onData, data: joinPoints(points), panels };
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
export function curvesOf({ fine, kappa, seen }: Panel, x: ArrayLike<number>): Curve[] {
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
export function judge({ onData, data }: Prediction, x: ArrayLike<number>) {
  const predicted = onData.predict(x);
  return { chiSquare: chiSquare(data, predicted), residuals: residuals(data, predicted) };
}

/** Of numbers for all measurements those of one. */
export const ofPanel = (all: Float64Array, { from, points }: Panel): Float64Array =>
  all.subarray(from, from + points.rows.length);
