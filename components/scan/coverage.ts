import { dataAxis, type KeptPoints } from '@/components/notebook/kept-points';
import type { TemplateSettings } from '@/components/notebook/prediction';
import { jointCoverage, type CoverageFacts } from '@/lib/inference/summary';
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

/** Where the kept values stand in ln κ: centres of their bins, or their points. */
function placesOf({ lo, hi, kappa }: KeptPoints, options: Record<string, unknown>): Float64Array {
  return lo && hi && options.binAverage !== false
    ? lo.map((low, i) => 0.5 * Math.log(low * hi[i]))
    : kappa.map((value) => Math.log(value));
}

/** What bins can tell of frequencies, those of all measurements together; null for fewer than three. */
export function coverageOf(points: KeptPoints, options: Record<string, unknown>): Coverage | null {
  const parts = [points, ...(points.together?.further ?? [])].filter(({ rows }) => rows.length > 1);
  const values = parts.flatMap((part) => {
    const places = placesOf(part, options);
    return Array.from(places, (place, i) => ({ place, sigma: part.sigma[i] }));
  });
  const bins = values.length;
  if (bins < 3) return null;
  const facts = jointCoverage(parts.map((part) => dataAxis(part, options)));
  values.sort((a, b) => a.place - b.place);
  const weighted = values.every(({ sigma }) => sigma > 0);
  const places = values.map(({ place }) => place);
  const weights = values.map(({ sigma }) => (weighted ? 1 / (sigma * sigma) : 1));
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
