import { finding, showCell, showNumber } from './errors';
import type { ColumnRole, Finding, ParsedTable, PowerSpectrum, ResolvedSpectrum } from './types';
import { bispectrumUnit, wavenumberUnit, type WavenumberUnit } from './units';

/** Dimensionless amplitudes of the primordial power spectrum are near 2e-9; ln(10¹⁰ A_s) and the like are above this. */
const LARGEST_AMPLITUDE = 1e-2;
/** Tilts beyond this are no tilts: n_s − 1 was given, or a percentage. */
const TILTS = [0.1, 3] as const;
/** H₀/(100 km/s/Mpc): outside, H₀ itself was given. */
const HUBBLES = [0.1, 2] as const;

/** Wavenumbers of one triangle, all in the unit of the first column and of one length. */
export type Triangle = readonly [k1: number, k2: number, k3: number];

/**
 * Factor that turns B into the dimensionless shape: S = (k1 k2 k3)² B / ((2π)⁴ P²) with
 * P² = [P(k1) P(k2) P(k3)]^(2/3) and P(k) = A_s (k/k_*)^(n_s − 1), dimensionless, k³ times the power over 2π². The definition
 * ⟨ζζζ⟩′ = (2π)⁴ P² S/(k1 k2 k3)² is of a scale-invariant P; the geometric mean is the product that is symmetric in the sides.
 *
 * @param triangle k1, k2, k3 > 0 in one unit; B in its inverse sixth power
 * @param pivot k_* in the same unit; any value where the tilt is 1
 */
export function shapeFactor(
  [k1, k2, k3]: Triangle,
  { amplitude, tilt }: Pick<ResolvedSpectrum, 'amplitude' | 'tilt'>,
  pivot: number,
): number {
  const product = k1 * k2 * k3;
  const power =
    amplitude * amplitude * ((k1 / pivot) * (k2 / pivot) * (k3 / pivot)) ** ((2 / 3) * (tilt - 1));
  return product ** 2 / ((2 * Math.PI) ** 4 * power);
}

/** The spectrum with every unit settled, and what brings columns to one: k by `wavenumber`, B by `bispectrum`, pivot in the unit of k. */
export interface SpectrumScales {
  spectrum: ResolvedSpectrum;
  /** By role: what turns its wavenumbers into 1/Mpc or h/Mpc. */
  wavenumber: Partial<Record<ColumnRole, number>>;
  /** Turns B into the inverse sixth power of that unit. */
  bispectrum: number;
  pivot: number;
}

type Columns = Partial<Record<ColumnRole, number>>;

const inRange = (value: number, [lo, hi]: readonly [number, number]) => value >= lo && value <= hi;

/** What of the power spectrum is missing, or can't be what it is said to be. */
function checkValues({ amplitude, tilt, pivot, h }: PowerSpectrum, column: number): Finding[] {
  const part = 'file' as const;
  const missing = [
    ...(amplitude === undefined ? ['amplitude A_s'] : []),
    ...(tilt === undefined ? ['tilt n_s'] : []),
    ...(tilt !== undefined && tilt !== 1 && pivot === undefined ? ['pivot k_*'] : []),
  ];
  const findings: Finding[] = [];
  if (missing.length > 0) {
    const message = `Column ${column + 1} is a bispectrum B: the ${missing.join(', the ')} of the power spectrum ${missing.length === 1 ? 'is' : 'are'} missing.`;
    findings.push(finding('spectrum-missing', 'error', message, { part, column: column + 1 }));
  }
  const wrong = (message: string) => findings.push(finding('spectrum-value', 'error', message, { part }));
  if (amplitude !== undefined && !(amplitude > 0 && amplitude <= LARGEST_AMPLITUDE)) {
    wrong(`The amplitude A_s is ${showNumber(amplitude)}, which no primordial power spectrum has.`);
  }
  if (tilt !== undefined && !inRange(tilt, TILTS))
    wrong(`The tilt n_s is ${showNumber(tilt)}; 1 is no tilt.`);
  if (pivot !== undefined && !(pivot > 0 && pivot < Infinity)) wrong('The pivot k_* is not above zero.');
  if (h !== undefined && !inRange(h, HUBBLES))
    wrong(`h is ${showNumber(h)}; it is H₀ in units of 100 km/s/Mpc.`);
  return findings;
}

/** The unit of a column, or what was said by hand where the file doesn't say; null with a finding where neither does or they differ. */
function settleUnit(
  table: ParsedTable,
  column: number,
  given: string | undefined,
  read: (text: string) => WavenumberUnit | null,
  what: string,
  findings: Finding[],
): WavenumberUnit | null {
  const place = { part: 'file' as const, column: column + 1 };
  const said = table.columns[column].unit;
  const text = said ?? given;
  if (text === undefined) {
    const message = `The file doesn’t say the unit of ${what}.`;
    // Once is enough for wavenumbers of several columns.
    if (findings.some((found) => found.message === message)) return null;
    findings.push(finding('unit-missing', 'error', message, place));
    return null;
  }
  const unit = read(text);
  if (!unit) {
    const message = `The unit of ${what}, ${showCell(text)}, can’t be used.`;
    findings.push(finding('unit-missing', 'error', message, place));
    return null;
  }
  const other = said !== undefined && given !== undefined ? read(given) : null;
  if (other && (other.hubble !== unit.hubble || other.perMpc !== unit.perMpc)) {
    const message = `The file gives ${what} in ${showCell(text)}, and by hand ${showCell(given ?? '')} was chosen.`;
    findings.push(
      finding(
        'units-differ',
        'error',
        message,
        place,
        'Choose the unit that the file says, or correct the file.',
      ),
    );
    return null;
  }
  return unit;
}

/**
 * Settles units and scales for turning B into S. A unit that the file says counts; one that it doesn't has to be said in the
 * spectrum. h is needed where one of k, B and (with a tilt) the pivot has h in its unit and another hasn't.
 *
 * @returns scales, or null where a finding is an error
 */
export function settleSpectrum(
  table: ParsedTable,
  columns: Columns,
  given: PowerSpectrum,
): { scales: SpectrumScales | null; findings: Finding[] } {
  const column = columns.B ?? 0;
  const findings = checkValues(given, column);
  const roles = (['kLong', 'kShort', 'k1', 'k2', 'k3'] as const).filter(
    (role) => columns[role] !== undefined,
  );
  const units = roles.map((role) =>
    settleUnit(table, columns[role]!, given.wavenumberUnit, wavenumberUnit, 'its wavenumbers', findings),
  );
  const ofB = settleUnit(table, column, given.bispectrumUnit, bispectrumUnit, 'B', findings);
  const { amplitude, tilt, h, pivotUnit = '1/Mpc' } = given;
  const ofPivot = wavenumberUnit(pivotUnit);
  if (!ofPivot) {
    const message = `The unit of the pivot, ${showCell(pivotUnit)}, can’t be used.`;
    findings.push(finding('unit-missing', 'error', message, { part: 'file' }));
  }
  const [first] = units;
  if (findings.length > 0 || !first || !ofB || !ofPivot || amplitude === undefined || tilt === undefined)
    return { scales: null, findings };
  const pivot = given.pivot ?? 1;
  const mixed = ofB.hubble !== first.hubble || (tilt !== 1 && ofPivot.hubble !== first.hubble);
  if (mixed && h === undefined) {
    const message = `Of k, B and the pivot some are in units with h and others without.`;
    return {
      scales: null,
      findings: [finding('hubble-missing', 'error', message, { part: 'file', column: column + 1 })],
    };
  }
  // 1/Mpc is 1/h of h/Mpc, and Mpc⁶ is h⁶ of (Mpc/h)⁶.
  const steps = (from: WavenumberUnit) => (h ?? 1) ** (from.hubble - first.hubble);
  return {
    findings,
    scales: {
      spectrum: {
        amplitude,
        tilt,
        pivot: given.pivot ?? null,
        pivotUnit: given.pivot === undefined ? null : pivotUnit,
        wavenumberUnit: table.columns[columns[roles[0]]!].unit ?? given.wavenumberUnit ?? '',
        bispectrumUnit: table.columns[column].unit ?? given.bispectrumUnit ?? '',
        h: mixed ? (h ?? null) : null,
      },
      wavenumber: Object.fromEntries(roles.map((role, i) => [role, units[i]?.perMpc ?? 1])),
      bispectrum: (ofB.perMpc * steps(ofB)) ** -6,
      pivot: pivot * ofPivot.perMpc * steps(ofPivot),
    },
  };
}

/** What has become of B, for the list of checks. */
export function convertedFinding(spectrum: ResolvedSpectrum, factors: Float64Array, column: number): Finding {
  const { amplitude, tilt, pivot, pivotUnit } = spectrum;
  const at = pivot === null ? '' : `, k_* = ${showNumber(pivot)} ${pivotUnit}`;
  const [lo, hi] = [Math.min(...factors), Math.max(...factors)];
  const message =
    `B was turned into S with A_s = ${showNumber(amplitude)}, n_s = ${showNumber(tilt)}${at}: ` +
    `factors from ${showNumber(lo)} to ${showNumber(hi)}, covariance and mocks alike.`;
  return finding('bispectrum-converted', 'note', message, { part: 'file', column: column + 1 });
}
