import { formatNumber, minus } from '@/lib/figures/format';
import type { ParameterDeclaration, Prior } from '@/lib/templates';
import { plain } from '@/components/words/counts';

/** The kinds in the order of the choice. */
export const priorKinds: readonly { kind: Prior['kind']; label: string }[] = [
  { kind: 'uniform', label: 'uniform' },
  { kind: 'log-uniform', label: 'log-uniform' },
  { kind: 'normal', label: 'normal' },
  { kind: 'half-normal', label: 'half-normal' },
  { kind: 'truncated-normal', label: 'truncated normal' },
  { kind: 'isotropic', label: 'isotropic' },
  { kind: 'fixed', label: 'fixed' },
];

/** The numbers of each kind, in the order of their fields. */
export const priorFields = {
  uniform: ['lo', 'hi'],
  'log-uniform': ['lo', 'hi'],
  normal: ['mean', 'sd'],
  'half-normal': ['sd'],
  'truncated-normal': ['mean', 'sd', 'lo', 'hi'],
  isotropic: [],
  fixed: ['value'],
} as const satisfies Record<Prior['kind'], readonly string[]>;

export const fieldWords: Record<string, string> = {
  lo: 'from',
  hi: 'to',
  mean: 'mean',
  sd: 'sd',
  value: 'at',
};

/** A bound in words: π and its half by name. */
export function bound(value: number): string {
  for (const [turn, word] of [
    [Math.PI, 'π'],
    [Math.PI / 2, 'π/2'],
  ] as const) {
    if (Math.abs(Math.abs(value) - turn) < 1e-9) return (value < 0 ? minus : '') + word;
  }
  return value === 0 ? formatNumber(0, 0) : plain(value);
}

/** "uniform 1 to 12", "normal 0, 30" */
export function priorInWords(prior: Prior, declaration?: ParameterDeclaration): string {
  switch (prior.kind) {
    case 'uniform':
      return declaration?.circular && prior.hi - prior.lo > 6.28
        ? 'uniform, circular'
        : `uniform ${bound(prior.lo)} to ${bound(prior.hi)}`;
    case 'log-uniform':
      return `log-uniform ${bound(prior.lo)} to ${bound(prior.hi)}`;
    case 'normal':
      return `normal ${bound(prior.mean)}, ${bound(prior.sd)}`;
    case 'half-normal':
      return `half-normal, ${bound(prior.sd)}`;
    case 'truncated-normal':
      return `normal ${bound(prior.mean)}, ${bound(prior.sd)} in ${bound(prior.lo)} to ${bound(prior.hi)}`;
    case 'fixed':
      return `fixed at ${bound(prior.value)}`;
    case 'isotropic':
      return 'isotropic';
  }
}

/** Kinds that a parameter can take: `isotropic` belongs to mixing angles, and where values are of both signs some make no sense. */
export function kindsFor({ role, range }: ParameterDeclaration): Prior['kind'][] {
  return priorKinds
    .map(({ kind }) => kind)
    .filter((kind) => {
      if (kind === 'isotropic') return role === 'angle';
      if (kind === 'normal') return range[0] === -Infinity && range[1] === Infinity;
      if (kind === 'half-normal') return range[0] <= 0 && range[1] === Infinity;
      if (kind === 'log-uniform') return range[1] > 0;
      return true;
    });
}

/** A prior of another kind that covers about what this one covers. */
export function convertPrior(
  kind: Prior['kind'],
  ends: readonly [number, number],
  declaration: ParameterDeclaration,
): Prior {
  const figures = (value: number) => Number(value.toPrecision(4));
  const [lo, hi] = ends[1] > ends[0] ? ends : [ends[0] - 1, ends[0] + 1];
  const [from, to] = [Math.max(declaration.range[0], lo), Math.min(declaration.range[1], hi)];
  const mean = figures(0.5 * (from + to));
  const sd = figures((to - from) / 4) || 1;
  switch (kind) {
    case 'uniform':
      return { kind, lo: exact(from, figures), hi: exact(to, figures) };
    case 'log-uniform':
      return { kind, lo: figures(from > 0 ? from : to / 100), hi: exact(to, figures) };
    case 'normal':
      return { kind, mean, sd };
    case 'half-normal':
      return { kind, sd: figures(Math.max(Math.abs(from), Math.abs(to)) / 2) || 1 };
    case 'truncated-normal':
      return { kind, mean, sd, lo: exact(from, figures), hi: exact(to, figures) };
    case 'fixed':
      return { kind, value: mean };
    case 'isotropic':
      return { kind };
  }
}

/** Ends that are a turn stay exact: rounding π up would leave the template's range. */
function exact(value: number, round: (value: number) => number): number {
  const turns = [Math.PI, -Math.PI, Math.PI / 2];
  return turns.find((turn) => Math.abs(turn - value) < 1e-9) ?? round(value);
}
