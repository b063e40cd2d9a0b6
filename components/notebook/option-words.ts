import { listed } from '@/components/words/counts';
import { findTemplate, TemplateError } from '@/lib/templates';
import type { Side } from './conflict-choice';
import type { TemplateSettings } from './prediction';

/** What each option is called beside its form. */
export const optionLabels: Record<string, string> = {
  fields: 'Number of fields',
  amplitudes: 'Oscillation as',
  vertex: 'Cubic interaction',
  phases: 'Phases',
  binAverage: 'Prediction',
  binWeight: 'Weight of the average, power of κ',
};

/** What the choices of options are called. */
export const choiceLabels: Record<string, string> = {
  quadrature: 'cosine and sine amplitude',
  'amplitude-phase': 'amplitude and phase',
  // A dot over π is drawn badly by system menus.
  '1': 'in time, (∂ₜπ)²σ/Λ₁',
  '2': 'in space, (∂ᵢπ)²σ/(a²Λ₂)',
  mixture: 'mixture of both, angle α',
  locked: 'locked to the interaction',
  free: 'free, amplitude |C(μ)| kept',
};

/** The usual powers q of the weight κ^q, by what they count: k₃ soft, hard sides fixed. */
export const binWeightLabels: Record<string, string> = {
  '0': '0: uniform in ln κ',
  '2': '2: triangles by k₃ dk₃',
  '3': '3: triangles by k₃² dk₃',
};

/** "the mean of each bin with weight κ²"; null where the prediction is at κ, or the weight uniform. */
export function weightInWords(options: Readonly<Record<string, unknown>>, hasEdges: boolean): string | null {
  const power = Number(options.binWeight ?? 0);
  if (!hasEdges || options.binAverage === false || power === 0) return null;
  return `averaged over each bin with weight ${powerLabels[String(power)] ?? `κ^${String(power).replace('-', '−')}`}`;
}

/** Powers of κ. */
export const powerLabels: Record<string, string> = {
  '-1': 'κ⁻¹',
  '0': 'constant',
  '1': 'κ',
  '2': 'κ²',
  '3': 'κ³',
  '4': 'κ⁴',
};

function valueInWords(name: string, value: unknown): string {
  if (Array.isArray(value)) {
    return value.length ? listed(value.map((each) => powerLabels[String(each)] ?? String(each))) : 'none';
  }
  if (typeof value === 'boolean') return value ? 'averaged over each bin' : 'at κ of each bin';
  return name === 'fields' || name === 'binWeight'
    ? String(value)
    : (choiceLabels[String(value)] ?? String(value));
}

/** The options of a template as label and value, in the order in which they are stored. */
export function optionEntries(
  options: Readonly<Record<string, unknown>>,
): { name: string; what: string; value: string }[] {
  return Object.entries(options)
    .filter(([, value]) => value !== undefined && value !== null)
    .map(([name, value]) => ({
      name,
      what: name === 'background' ? 'Smooth background' : (optionLabels[name] ?? name),
      value: valueInWords(name, value),
    }));
}

/** With every option that was left out at its default, so that two choices can be set beside each other. */
function settled({ id, options }: TemplateSettings): Record<string, unknown> {
  try {
    return findTemplate(id).normaliseOptions(options);
  } catch (error) {
    if (error instanceof TemplateError) return options;
    throw error;
  }
}

/** Two templates with their options, field by field. */
export function templateSides(theirs: TemplateSettings, mine: TemplateSettings): Side[] {
  const [others, own] = [theirs, mine].map(
    (each) => new Map(optionEntries(settled(each)).map((entry) => [entry.name, entry])),
  );
  const names = [...new Set([...others.keys(), ...own.keys()])];
  return [
    {
      key: 'template',
      what: 'Template',
      theirs: findTemplate(theirs.id).title,
      mine: findTemplate(mine.id).title,
    },
    ...names.map((name) => ({
      key: name,
      what: others.get(name)?.what ?? own.get(name)?.what ?? name,
      theirs: others.get(name)?.value ?? 'doesn’t apply',
      mine: own.get(name)?.value ?? 'doesn’t apply',
    })),
  ];
}
