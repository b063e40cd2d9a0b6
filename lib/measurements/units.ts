/** Metric prefixes of lengths that surveys use. */
const PREFIXES: Record<string, number> = { Gpc: 1e3, Mpc: 1, kpc: 1e-3, pc: 1e-6 };

/** A wavenumber's unit: powers of the reduced Hubble constant h, and how many 1/Mpc one of it is. */
export interface WavenumberUnit {
  hubble: 0 | 1;
  perMpc: number;
}

/**
 * Reads the unit of a wavenumber: `h/Mpc`, `1/Mpc`, `Mpc-1`, `Mpc^-1`, `h Mpc**-1`, `1 / kpc`, … Null for anything else.
 */
export function wavenumberUnit(text: string): WavenumberUnit | null {
  const plain = text
    .replace(/[\s*·^()[\]{}$\\]/g, '')
    .replace('−', '-')
    .replace('⁻¹', '-1');
  const match = /^(?:1|(h|littleh|h100))?(?:\/(Gpc|Mpc|kpc|pc)|(Gpc|Mpc|kpc|pc)-1(h)?)$/.exec(plain);
  if (!match) return null;
  const [, before, over, power, behind] = match;
  return { hubble: before || behind ? 1 : 0, perMpc: 1 / PREFIXES[over ?? power] };
}

/**
 * Reads the unit of a bispectrum, the sixth power of a length: `Mpc^6`, `(Mpc/h)^6`, `Mpc**6 h**-6`, `h^-6 Mpc^6`, … Its
 * `perMpc` is that of the inverse length, as of a wavenumber. Null for anything else.
 */
export function bispectrumUnit(text: string): WavenumberUnit | null {
  const plain = text
    .replace(/[\s*·^[\]{}$\\]/g, '')
    .replaceAll('−', '-')
    .replace('⁻⁶', '-6')
    .replace('⁻¹', '-1')
    .replace('⁶', '6');
  const length = '(Gpc|Mpc|kpc|pc)';
  const bare = new RegExp(`^\\(?${length}\\)?6$`).exec(plain);
  if (bare) return { hubble: 0, perMpc: 1 / PREFIXES[bare[1]] };
  const withHubble = [
    `\\(${length}(?:/h|h-1)\\)6`,
    `\\(h-1${length}\\)6`,
    `${length}6(?:/h6|h-6)`,
    `h-6${length}6`,
  ].flatMap((form) => new RegExp(`^${form}$`).exec(plain)?.[1] ?? []);
  return withHubble.length ? { hubble: 1, perMpc: 1 / PREFIXES[withHubble[0]] } : null;
}

/** True where a column says that it has no unit. */
export function isDimensionless(text: string): boolean {
  return /^\s*(?:1|none|dimensionless|-+|)\s*$/i.test(text);
}
