import { logIsotropicDensity } from '@/lib/templates';
import { InferenceError } from '../inference-error';
import { scalarPriorOf, type ParameterLayout } from '../parameter-layout';
import { lnPriorDensity, priorSupport, type ScalarPrior } from '../priors';
import { identityDesign, type Coordinates, type EvidenceDesign, type ProfileDesign } from './coordinates';
import { linearPrior, type LinearPrior } from './linear-prior';
import type { Design } from './moments';
import { circle, gaussLegendre } from './quadrature-nodes';

/** Roles of parameters that the prediction is linear in. */
const LINEAR_ROLES = ['quadrature', 'amplitude', 'coupling'];
/** Nodes of the vertex angle and of the mixing angle where a maximum over them is looked for. */
const PROFILE_NODES = 24;

interface Nuisance {
  index: number;
  /** Null for the isotropic prior of one angle. */
  prior: ScalarPrior | null;
  circular: boolean;
}

/**
 * The coordinates of a template of one or two fields under a notebook's priors. What the prediction is linear in (amplitudes,
 * coupling) is a coefficient; phases, mixing angle and vertex angle are nodes of a quadrature. The coefficients of the columns
 * are read off the template itself, at unit vectors.
 *
 * The profile frees the linear terms: two a field where its phase is free (a fixed mixing angle isn't held then), one (signed) where
 * it is locked, two for a mixture of vertices whose angle is sampled; two locked fields have g w_1 and g w_2 of one sign.
 */
export function templateCoordinates(layout: ParameterLayout): Coordinates {
  const { template, position, phases, angles, vertexAngle, masses } = layout;
  const { parameters } = template;
  const fields = masses.length;
  if (fields < 1 || fields > 2) {
    throw new InferenceError(
      'no_frequency',
      'template.options.fields',
      `a scan is of one field or two, not of ${fields}`,
      'choose a template with one field or two',
    );
  }
  const sampled = (index: number): boolean => index >= 0 && position[index] >= 0;
  const linear = layout.free.filter((index) => LINEAR_ROLES.includes(parameters[index].role));
  const linearPriors: LinearPrior[] = linear.map((index) => {
    const prior = scalarPriorOf(layout, index);
    if (!prior) throw new TypeError(`${parameters[index].name} has no prior of its own`);
    return linearPrior(prior);
  });
  const freePhases = phases.filter(sampled);
  const nuisance: Nuisance[] = [
    ...freePhases,
    ...angles.filter(sampled),
    ...(sampled(vertexAngle) ? [vertexAngle] : []),
  ].map((index) => ({ index, prior: scalarPriorOf(layout, index), circular: parameters[index].circular }));

  const raw = template.blocks.reduce((sum, { width }) => sum + width, 0);
  const full = Float64Array.from(layout.base);
  const written = new Float64Array(template.columnCount);
  const none = new Float64Array(template.columnCount);
  const holdsLinear = parameters.some(
    ({ role }, index) => LINEAR_ROLES.includes(role) && !sampled(index) && layout.base[index] !== 0,
  );

  /** The design at what stands in `full`. */
  const probe = (): Design => {
    for (const index of linear) full[index] = 0;
    if (holdsLinear) template.coefficients(full, none);
    const matrix = new Float64Array(raw * linear.length);
    linear.forEach((index, j) => {
      full[index] = 1;
      template.coefficients(full, written);
      full[index] = 0;
      for (let a = 0; a < raw; a += 1) matrix[a * linear.length + j] = written[a] - none[a];
    });
    return { raw, count: linear.length, matrix, offset: holdsLinear ? none.slice(0, raw) : null };
  };
  const place = (at: ArrayLike<number>): void => {
    for (let f = 0; f < fields; f += 1) full[masses[f]] = at[f];
  };

  /** Calls `visit` at every node of the product of the nuisance's rules; the values stand in `full`. */
  const overNodes = (
    rules: readonly { index: number; at: Float64Array; log: Float64Array }[],
    visit: (log: number) => void,
  ) => {
    const walk = (d: number, log: number): void => {
      if (d === rules.length) {
        visit(log);
        return;
      }
      const { index, at, log: logs } = rules[d];
      for (let k = 0; k < at.length; k += 1) {
        full[index] = at[k];
        walk(d + 1, log + logs[k]);
      }
    };
    walk(0, 0);
  };

  const rule = ({ index, prior, circular }: Nuisance, sharpness: number) => {
    const finer = Math.ceil(9 * sharpness);
    const [lo, hi] = prior ? priorSupport(prior) : [0, Math.PI / 2];
    const whole = circular && prior?.kind === 'uniform' && hi - lo > 2 * Math.PI - 1e-9;
    const most = fields === 1 ? 720 : 64;
    const least = Math.min(most, Math.max(fields === 1 ? 48 : 24, finer));
    // The isotropic angle's integrand is even about both of its ends: midpoints converge geometrically, as on a circle.
    if (!prior) {
      const step = Math.PI / 2 / least;
      const at = Float64Array.from({ length: least }, (_, k) => (k + 0.5) * step);
      return { index, at, log: at.map((x) => Math.log(step) + logIsotropicDensity([x])) };
    }
    const nodes = whole ? circle(least) : gaussLegendre(...bounded(lo, hi), least);
    const log = nodes.at.map((x, k) => Math.log(nodes.weight[k]) + lnPriorDensity(prior, x));
    return { index, at: nodes.at, log };
  };

  const evidence = (at: ArrayLike<number>, sharpness: number): EvidenceDesign[] | null => {
    if (fields > 1 && freePhases.length > 0) return null;
    place(at);
    const out: EvidenceDesign[] = [];
    overNodes(
      nuisance.map((one) => rule(one, sharpness)),
      (logWeight) => out.push({ design: probe(), priors: linearPriors, logWeight }),
    );
    return out;
  };

  const coupled = linear.length > 0;
  const everyPhaseFree = freePhases.length === fields;
  const phaseFree = template.structure === 'polar' || template.structure === 'mixed-polar';
  const sharedSigns = template.structure === 'mixed' && fields === 2 && coupled && angles.some(sampled);

  /** Columns u_1, u_2 of two locked fields, read off at θ = 0 and π/2. */
  const ofEachField = (): Design => {
    const matrix = new Float64Array(raw * 2);
    [0, Math.PI / 2].forEach((angle, f) => {
      full[angles[0]] = angle;
      const { matrix: one } = probe();
      for (let a = 0; a < raw; a += 1) matrix[a * 2 + f] = one[a];
    });
    return { raw, count: 2, matrix, offset: null };
  };

  const profile = (at: ArrayLike<number>): ProfileDesign[] => {
    if (phaseFree && everyPhaseFree && coupled) return [{ design: identityDesign(raw), sameSign: false }];
    place(at);
    const angled = sampled(vertexAngle);
    if (sharedSigns) {
      const nodes = angled
        ? Array.from({ length: PROFILE_NODES }, (_, k) => Math.PI * ((k + 0.5) / PROFILE_NODES - 0.5))
        : [full[vertexAngle]];
      return nodes.map((alpha) => {
        if (angled) full[vertexAngle] = alpha;
        return { design: ofEachField(), sameSign: true };
      });
    }
    if (template.structure === 'mixed' && angled && coupled && fields === 1) {
      const matrix = new Float64Array(raw * 2);
      [0, Math.PI / 2].forEach((alpha, j) => {
        full[vertexAngle] = alpha;
        const { matrix: one } = probe();
        for (let a = 0; a < raw; a += 1) matrix[a * 2 + j] = one[a];
      });
      return [{ design: { raw, count: 2, matrix, offset: null }, sameSign: false }];
    }
    const out: ProfileDesign[] = [];
    overNodes(
      nuisance.map((one) => rule(one, 1)),
      () => out.push({ design: probe(), sameSign: false }),
    );
    return out;
  };

  const angledOne = template.structure === 'mixed' && fields === 1 && sampled(vertexAngle) && coupled;
  let freedom: number | null =
    nuisance.length === 0 || angledOne ? linear.length + (angledOne ? 1 : 0) : null;
  if (phaseFree && everyPhaseFree && coupled) freedom = raw;
  return { freedom, profile, evidence };
}

/** Finite ends for a prior that has none: a phase or an angle lies on a circle. */
function bounded(lo: number, hi: number): [number, number] {
  return [Math.max(lo, -Math.PI), Math.min(hi, Math.PI)];
}
