import { TemplateError, quoteValue } from './errors';
import type { FieldKind } from './types';

/** What an option accepts, as data for forms and for the list of templates. */
export type OptionDeclaration =
  | { name: string; kind: 'integer'; min: number; max: number; default: number; description: string }
  | { name: string; kind: 'number'; min: number; max: number; default: number; description: string }
  | {
      name: string;
      kind: 'choice';
      values: readonly (string | number)[];
      default: string | number;
      description: string;
    }
  | {
      name: string;
      kind: 'powers';
      min: number;
      max: number;
      default: readonly number[];
      description: string;
    }
  | { name: string; kind: 'fields'; min: number; max: number; default: number; description: string }
  | { name: string; kind: 'boolean'; default: boolean | null; description: string };

type Described<D> = D extends unknown ? Omit<D, 'name'> : never;

/** One option: its description as data, and the reading of a value that somebody gave. */
export interface TemplateOption<T> {
  readonly data: Described<OptionDeclaration>;
  /** The settled value; `undefined` in gives the default. Throws TemplateError `invalid_option` at `path`. */
  read(value: unknown, path: string): T;
}

function refuse(path: string, value: unknown, accepted: string): never {
  throw new TemplateError('invalid_option', path, `${quoteValue(value)} is not accepted; give ${accepted}`);
}

/** A whole number from `min` to `max`, both included. */
export function integerOption(
  min: number,
  max: number,
  fallback: number,
  description: string,
): TemplateOption<number> {
  return {
    data: { kind: 'integer', min, max, default: fallback, description },
    read(value, path) {
      if (value === undefined) return fallback;
      if (typeof value === 'number' && Number.isInteger(value) && value >= min && value <= max) return value;
      return refuse(path, value, `a whole number from ${min} to ${max}`);
    },
  };
}

/** A real number from `min` to `max`, both included. */
export function numberOption(
  min: number,
  max: number,
  fallback: number,
  description: string,
): TemplateOption<number> {
  return {
    data: { kind: 'number', min, max, default: fallback, description },
    read(value, path) {
      if (value === undefined) return fallback;
      if (typeof value === 'number' && value >= min && value <= max) return value;
      return refuse(path, value, `a number from ${min} to ${max}`);
    },
  };
}

/** One of a few named values. */
export function choiceOption<const T extends string | number>(
  values: readonly T[],
  fallback: NoInfer<T>,
  description: string,
): TemplateOption<T> {
  return {
    data: { kind: 'choice', values, default: fallback, description },
    read(value, path) {
      if (value === undefined) return fallback;
      const found = values.find((candidate) => candidate === value);
      return found ?? refuse(path, value, values.map((candidate) => JSON.stringify(candidate)).join(' or '));
    },
  };
}

/**
 * Fields as a number of heavy ones, or as a list of "heavy" and "light" in any order. Settled to the number if all are
 * heavy, else to the list with the light ones first.
 */
export function fieldsOption(
  max: number,
  fallback: number,
  description: string,
): TemplateOption<number | FieldKind[]> {
  const accepted = `a whole number from 1 to ${max}, or a list such as ["light", "heavy"] of as many`;
  return {
    data: { kind: 'fields', min: 1, max, default: fallback, description },
    read(value, path) {
      if (value === undefined) return fallback;
      if (typeof value === 'number' && Number.isInteger(value) && value >= 1 && value <= max) return value;
      if (!Array.isArray(value) || value.length < 1 || value.length > max)
        return refuse(path, value, accepted);
      const kinds = value.map((kind: unknown, i) =>
        kind === 'heavy' || kind === 'light' ? kind : refuse(`${path}[${i}]`, kind, '"heavy" or "light"'),
      );
      const light = kinds.filter((kind) => kind === 'light');
      return light.length === 0 ? kinds.length : [...light, ...kinds.filter((kind) => kind === 'heavy')];
    },
  };
}

/** How many fields an option `fields` says, whether a number or a list; 0 where there is none. */
export function fieldCount(fields: unknown): number {
  if (typeof fields === 'number') return fields;
  return Array.isArray(fields) ? fields.length : 0;
}

/** Distinct whole powers of kappa, given in any order and settled in increasing order. */
export function powersOption(
  fewest: number,
  fallback: readonly number[],
  description: string,
): TemplateOption<number[]> {
  const [min, max] = [-1, 4];
  const accepted = `a list of ${fewest === 0 ? '' : `at least ${fewest} `}distinct whole powers from ${min} to ${max}`;
  return {
    data: { kind: 'powers', min, max, default: fallback, description },
    read(value, path) {
      if (value === undefined) return [...fallback];
      if (!Array.isArray(value) || value.length < fewest) return refuse(path, value, accepted);
      const powers = value.map((power: unknown, i) =>
        typeof power === 'number' && Number.isInteger(power) && power >= min && power <= max
          ? power
          : refuse(`${path}[${i}]`, power, `a whole power from ${min} to ${max}`),
      );
      if (new Set(powers).size !== powers.length) return refuse(path, value, accepted);
      return powers.sort((a, b) => a - b);
    },
  };
}

/** Yes, no, or left to the data (`undefined`; JSON's null is read as that too). */
export function undecidedBooleanOption(description: string): TemplateOption<boolean | undefined> {
  return {
    data: { kind: 'boolean', default: null, description },
    read(value, path) {
      if (value === undefined || value === null) return undefined;
      return typeof value === 'boolean' ? value : refuse(path, value, 'true or false, or leave it out');
    },
  };
}

/** The options of a template by name, in the order in which they are written out. */
export type OptionSet = Readonly<Record<string, TemplateOption<unknown>>>;

/** The settled values that an option set gives. */
export type OptionValues<S extends OptionSet> = {
  [K in keyof S]: S[K] extends TemplateOption<infer T> ? T : never;
};

/**
 * Settles options: fills in defaults, keeps the set's key order, leaves out what stays undecided. Settling twice
 * changes nothing. Throws TemplateError `invalid_option` or `unknown_option` naming `options.…`.
 */
export function settleOptions<S extends OptionSet>(set: S, given: unknown): OptionValues<S> {
  const source = given === undefined || given === null ? {} : given;
  if (typeof source !== 'object' || Array.isArray(source)) {
    return refuse('options', given, 'an object such as {"background": [1, 2]}');
  }
  const names = Object.keys(set);
  const unknown = Object.keys(source).find((name) => !names.includes(name));
  if (unknown !== undefined) {
    throw new TemplateError(
      'unknown_option',
      `options.${unknown}`,
      `there is no option ${quoteValue(unknown)}; this template has ${names.join(', ')}`,
    );
  }
  const values = new Map<string, unknown>(Object.entries(source));
  const settled = names
    .map((name) => [name, set[name].read(values.get(name), `options.${name}`)] as const)
    .filter(([, value]) => value !== undefined);
  // Every value was read by its own option, which is what the mapped type states.
  return Object.fromEntries(settled) as OptionValues<S>;
}

/** The set as data, in order. */
export function optionDeclarations(set: OptionSet): OptionDeclaration[] {
  return Object.entries(set).map(([name, option]) => ({ name, ...option.data }));
}

/** Which cubic interaction, of the templates of an exchange. */
export const vertexOption = choiceOption(
  [1, 2, 'mixture'],
  1,
  'Cubic interaction: 1 is π̇²σ/Λ₁, 2 is (∂π)²σ/(a²Λ₂), mixture is cos α of the first and sin α of the second.',
);

/** The options that every template has: the smooth background and the averaging over bins. */
export const sharedOptions = {
  background: powersOption(0, [1, 2], 'Powers of κ in the smooth background, from −1 to 4.'),
  binAverage: undecidedBooleanOption(
    'Whether the prediction is averaged over each bin; left out, it is wherever the measurement has bin edges.',
  ),
  binWeight: numberOption(
    -10,
    10,
    0,
    'Power q of the weight κ^q of the average in ln κ; 0 is uniform in ln κ.',
  ),
} as const;
