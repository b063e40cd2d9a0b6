import type { Diagnostic, Fit } from '@/lib/schemas';
import { assembledParameters } from '@/lib/inference/assembled-template';
import { findTemplate, partOfName } from '@/lib/templates';

/** A sampled parameter or derived quantity as figures and tables name it. */
export interface Quantity {
  name: string;
  symbol: { base: string; sub: string };
  label: string;
  unit: string;
  /** 0-based field in whose colour it is drawn; null for ink. */
  field: number | null;
  role: string;
  derived: boolean;
}

/** m/H is written as m₁/H: its unit stands with the symbol. */
export function quantitiesOf(
  template: Pick<Fit['snapshot']['template'], 'id' | 'options'>,
  /** What the measurements are called, where there are several. */
  labels: readonly string[] = ['measurement'],
): Map<string, Quantity> {
  const declaration = findTemplate(template.id);
  const sampled = assembledParameters(
    declaration.parameters(template.options),
    labels.map((label) => ({ label })),
  ).map(({ name, symbol, label, unit, field, role }): Quantity => ({
    name,
    symbol,
    label,
    unit,
    field:
      role === 'mass' || role === 'phase' || role === 'amplitude' || role === 'quadrature' ? field : null,
    role,
    derived: false,
  }));
  const derived = declaration
    .derived(template.options)
    .map(({ name, symbol, label, unit, field }): Quantity => ({
      name,
      symbol,
      label,
      unit,
      field,
      role: 'derived',
      derived: true,
    }));
  return new Map([...sampled, ...derived].map((quantity) => [quantity.name, quantity]));
}

/** One of a measurement among several is told by its number; a quantity that the template doesn't declare still has its name. */
export function quantityOf(quantities: ReadonlyMap<string, Quantity>, name: string): Quantity {
  const { name: base, part } = partOfName(name);
  const among = base === name ? undefined : quantities.get(base);
  return (
    quantities.get(name) ??
    (among && {
      ...among,
      name,
      symbol: { ...among.symbol, sub: `${among.symbol.sub} (${part + 1})` },
      label: `${among.label}, measurement ${part + 1}`,
    }) ?? {
      name,
      symbol: { base: name, sub: '' },
      label: name,
      unit: '',
      field: null,
      role: '',
      derived: false,
    }
  );
}

type Target = Fit['gate']['target'];

/** Smaller of bulk and tail; null where either is unknown. */
export function leastEss({ essBulk, essTail }: Diagnostic): number | null {
  return essBulk === null || essTail === null ? null : Math.min(essBulk, essTail);
}

/** True where a quantity meets the gate: R-hat below, effective sample size above. */
export function meetsGate(diagnostic: Diagnostic, target: Target): boolean {
  const ess = leastEss(diagnostic);
  return diagnostic.rhat !== null && ess !== null && diagnostic.rhat < target.rhat && ess > target.ess;
}

/** Derived quantities that are one number throughout aren't judged. */
export function judged(diagnostics: readonly Diagnostic[]): Diagnostic[] {
  return diagnostics.filter(({ derived, sd }) => !(derived && sd === 0));
}
