import { dataAxis, type KeptPoints } from '@/components/notebook/kept-points';
import type { TemplateSettings } from '@/components/notebook/prediction';
import { coverageFacts, type CoverageFacts } from '@/lib/inference/summary';
import { scanRange, type ScanRange } from '@/lib/inference/scan/scan-range';
import { spectralWindow, type SpectralWindow } from '@/lib/inference/scan/spectral-window';
import {
  findTemplate,
  isLightMass,
  TemplateError,
  type ParameterDeclaration,
  type Prior,
} from '@/lib/templates';

export interface Coverage {
  facts: CoverageFacts;
  window: SpectralWindow;
  bins: number;
  /** False where the errors are withheld: all bins weigh the same in the window. */
  weighted: boolean;
  /** Where the bins show frequency 0 again. */
  alias: number;
}

/** Points of the window between two frequencies that are told apart, where it isn't computed by a fast transform. */
const POINTS_PER_RESOLUTION = 12;
const MOST_POINTS = 6_000;

/** What bins can tell of frequencies; null for fewer than three. */
export function coverageOf(points: KeptPoints, options: Record<string, unknown>): Coverage | null {
  const bins = points.rows.length;
  if (bins < 3) return null;
  const facts = coverageFacts(dataAxis(points, options));
  const { lo, hi, kappa, sigma } = points;
  const places =
    lo && hi && options.binAverage !== false
      ? lo.map((low, i) => 0.5 * Math.log(low * hi[i]))
      : kappa.map((value) => Math.log(value));
  const weighted = sigma.every((error) => error > 0);
  const weights = sigma.map((error) => (weighted ? 1 / (error * error) : 1));
  const alias = 2 * facts.nyquist;
  const highest = 1.1 * alias;
  const count = Math.min(
    MOST_POINTS,
    Math.max(600, Math.ceil((highest / facts.resolution) * POINTS_PER_RESOLUTION)),
  );
  return { facts, window: spectralWindow(places, weights, highest, count), bins, weighted, alias };
}

/** Masses of the fields that a scan is of: the first two. */
function scannedMasses({ id, options }: TemplateSettings): readonly ParameterDeclaration[] {
  try {
    return findTemplate(id)
      .parameters(options)
      .filter(({ role }) => role === 'mass')
      .slice(0, 2);
  } catch (error) {
    if (error instanceof TemplateError) return [];
    throw error;
  }
}

export const rangeOf = (
  template: TemplateSettings,
  priors: Readonly<Record<string, Prior>>,
): ScanRange | null => {
  const masses = scannedMasses(template);
  return masses.some(isLightMass) ? null : scanRange(masses, priors);
};

/** True where a field's phase is a function of its mass: no parameter of the template turns it. */
export function isLocked({ id, options }: Pick<TemplateSettings, 'id' | 'options'>): boolean {
  try {
    const roles = findTemplate(id)
      .parameters(options)
      .map(({ role }) => role);
    return roles.includes('mass') && !roles.includes('phase') && !roles.includes('quadrature');
  } catch (error) {
    if (error instanceof TemplateError) return false;
    throw error;
  }
}
