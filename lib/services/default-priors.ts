import { partOfName, type ParameterDeclaration, type Prior } from '@/lib/templates';

/** The data that default priors may look at: κ and S of the kept bins. */
export interface DataScale {
  kappa: ArrayLike<number>;
  S: ArrayLike<number>;
}

/** Rounded up to one significant digit: 3.4 → 4, 0.021 → 0.03. */
function roundUp(value: number): number {
  const unit = 10 ** Math.floor(Math.log10(value));
  return Number((Math.ceil(value / unit - 1e-9) * unit).toPrecision(1));
}

const largest = (length: number, value: (i: number) => number): number =>
  Array.from({ length }, (_, i) => Math.abs(value(i))).reduce((a, b) => Math.max(a, b), 0);

/** Power p of a background coefficient `cm1`, `c0`, … `c4`, of one measurement or of one among several. */
const powerOf = (name: string): number => Number(partOfName(name).name.slice(1).replace('m', '-'));

/** The middle of the values, the upper one of two. */
const middle = (values: number[]): number => values.sort((a, b) => a - b)[values.length >> 1];

/**
 * Size that a coefficient must have for its term alone to reach the data; null for what isn't a coefficient. For an
 * amplitude of κ^½ the median of |S|/√κ, since the largest κ belong to the background; for a background term
 * max |S| / max κ^p.
 */
function coefficientScale({ role, name }: ParameterDeclaration, { kappa, S }: DataScale): number | null {
  const { length } = kappa;
  if (role === 'quadrature' || role === 'amplitude') {
    return middle(Array.from({ length }, (_, i) => Math.abs(S[i]) / Math.sqrt(kappa[i])));
  }
  if (role !== 'background') return null;
  return largest(length, (i) => S[i]) / largest(length, (i) => kappa[i] ** powerOf(name));
}

/**
 * The prior of a parameter that nobody gave one. It is the template's own, unless the data are out of its reach: where a
 * coefficient's scale s lies beyond three sd of a normal prior about zero, or beyond the end of a uniform one, that sd or
 * end becomes 3 s, rounded up to one digit. Priors are only ever widened, so that a large background or another
 * normalisation of S is not fought by a prior that nobody chose. The coupling g is left alone: its scale hangs on the
 * mass by many powers of ten. Without `data` (a blind measurement, of whose size a prior would tell) the template's own
 * prior stands.
 */
export function defaultPrior(declaration: ParameterDeclaration, data: DataScale | null): Prior {
  const prior = declaration.defaultPrior;
  const scale = data && coefficientScale(declaration, data);
  if (scale === null || !Number.isFinite(scale)) return prior;
  if (prior.kind === 'normal' && prior.mean === 0 && scale > 3 * prior.sd) {
    return { ...prior, sd: roundUp(3 * scale) };
  }
  if (prior.kind === 'uniform' && prior.lo === 0 && scale > prior.hi) {
    return { ...prior, hi: roundUp(3 * scale) };
  }
  return prior;
}
