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

/** True where a column says that it has no unit. */
export function isDimensionless(text: string): boolean {
  return /^\s*(?:1|none|dimensionless|-+|)\s*$/i.test(text);
}
