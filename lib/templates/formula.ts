/** A formula in TeX for typesetting; the oscillation of field i is wrapped in `\htmlClass{fi}{…}` for its colour. */
export interface TemplateFormula {
  /** The whole formula on one line. */
  wide: string;
  /** The same broken before plus signs, one display a line, for a narrow page. */
  lines: string[];
  /** What the symbols in it stand for, one equation each. */
  definitions: string[];
}

/** Wraps TeX in the mean over a bin, unless averaging is off. */
export function binMean(tex: string, averaged: boolean): string {
  return averaged ? `\\bigl\\langle ${tex}\\bigr\\rangle` : tex;
}

/** Gives the part of field `field` (counted from 0) its class. */
export function fieldClass(field: number, tex: string): string {
  return `\\htmlClass{f${field + 1}}{${tex}}`;
}

function powerTex(power: number): string {
  if (power === 0) return '';
  return power === 1 ? '\\kappa' : `\\kappa^{${power}}`;
}

/** The terms c_p ⟨κ^p⟩ of the background. */
export function backgroundTerms(powers: readonly number[], averaged: boolean): string[] {
  return powers.map((power) => {
    const tex = powerTex(power);
    return tex === '' ? 'c_{0}' : `c_{${power}}${binMean(tex, averaged)}`;
  });
}

/**
 * Puts S(κ) = Σ terms together. On a narrow page every field has its own line and the background goes three
 * terms to the line.
 */
export function sumFormula(
  fieldTerms: readonly string[],
  background: readonly string[],
  definitions: string[],
): TemplateFormula {
  const groups = [...fieldTerms];
  for (let i = 0; i < background.length; i += 3) groups.push(background.slice(i, i + 3).join(' + '));
  return {
    wide: `S(\\kappa) = ${[...fieldTerms, ...background].join(' + ')}`,
    lines: groups.map((group, i) => (i === 0 ? `S(\\kappa) = ${group}` : `\\quad {} + ${group}`)),
    definitions,
  };
}

/**
 * The formula with what turns it into the values of a measurement, where that has a window or columns: Ŝ_i = Σ_j W_ij S_j + Σ d t_i. It
 * stands among the definitions, so that the template's own line stays as it is.
 */
export function withTheory(
  formula: TemplateFormula,
  theory: { window: unknown; columns: readonly { name: string }[] } | null,
): TemplateFormula {
  if (!theory || (!theory.window && theory.columns.length === 0)) return formula;
  const names = theory.columns.map(({ name }) => `\\mathrm{${name.replaceAll('_', '\\_')}}`);
  const seen = theory.window ? '\\textstyle\\sum_j W_{ij}\\,S(\\kappa_j)' : 'S(\\kappa_i)';
  const terms = [seen, ...names.map((name) => `d_{${name}}\\,t^{${name}}_{i}`)];
  return { ...formula, definitions: [...formula.definitions, `\\hat{S}_i = ${terms.join(' + ')}`] };
}

/** What the angle brackets mean, where there are any. */
export function averageDefinition(averaged: boolean, weight: number): string[] {
  if (!averaged) return [];
  const measure = weight === 0 ? '' : `\\kappa^{${weight}}`;
  return [
    `\\langle f\\rangle = \\int_{\\mathrm{bin}} f\\,${measure}\\mathrm{d}\\ln\\kappa \\Big/ ` +
      `\\int_{\\mathrm{bin}} ${measure}\\mathrm{d}\\ln\\kappa`,
  ];
}
