import type { Rng } from '@/lib/sampler';
import { drawTruncatedNormal, lnTruncatedNormal } from './gaussian-tail';
import { drawLinearDensity, lnLinearDensity } from './linear-density';
import { rayShape } from './ray-shape';

/** What is known of an amplitude A ≥ 0 beside the data. */
export interface AmplitudePrior {
  lo: number;
  hi: number;
  /** Normal factor of the prior: exp(−½ ownPrecision (A − ownMean)²); precision 0 for none. */
  ownMean: number;
  ownPrecision: number;
  /** Power of A in the prior's density, integrable at lo: 0, −½ (weights of mixed fields) or −1 (log-uniform, lo > 0). */
  power: number;
  /** Variance of each of A cos φ and A sin φ: ½ E[A²], for the normal that stands in while others are drawn. */
  variance: number;
}

const PHASES = 16;
const AMPLITUDES = 32;
/** tan(s/2) at the nodes s = −π … π of the circle; the ends are the same point. */
/** Largest such tangent that counts as finite: the far side of the circle itself. */
const FARTHEST = 1e16;
const HALF_TANGENTS = Float64Array.from({ length: PHASES + 1 }, (_, k) =>
  Math.tan(Math.PI * (k / PHASES - 0.5)),
);

/**
 * One field's amplitude and phase under a conditional normal of its coefficients c = (A cos φ, −A sin φ),
 * exp(−½ cᵀ S c + tᵀ c) times the amplitude's prior; the phase is uniform.
 *
 * φ is drawn from its own conditional with A integrated out, on 16 nodes with a linear density between them. The nodes are
 * even in the angle ψ of the whitened coefficients, mapped by tan(s/2) → τ tan(s/2) round the best ψ, so that they gather
 * where the data fix the phase and cover the circle where they don't. Then A given φ: a truncated normal; with a power of
 * A in the prior and A near 0, a density linear between 32 nodes in √A or ln A. No Cartesian step: the density of (A, φ)
 * has no factor A, so the acceptance ratio stays bounded as A → 0.
 */
export class PolarPair {
  private saa = 0;
  private sab = 0;
  private sbb = 0;
  private ta = 0;
  private tb = 0;
  private readonly prior: AmplitudePrior = {
    lo: 0,
    hi: 1,
    ownMean: 0,
    ownPrecision: 0,
    power: 0,
    variance: 1,
  };
  // Whitening of the pair (upper triangular, M'M = S + ridge), the middle and the stretch of the nodes.
  private m00 = 1;
  private m01 = 0;
  private m11 = 1;
  private centreCosine = 1;
  private centreSine = 0;
  private stretch = 1;
  private readonly heights = new Float64Array(PHASES + 1);
  // Working space of the nodes: exponent at the best A, and what multiplies its exponential.
  private readonly peaks = new Float64Array(PHASES);
  private readonly factors = new Float64Array(PHASES);
  private readonly lows = new Float64Array(PHASES);
  private readonly highs = new Float64Array(PHASES);
  private laid = false;
  private turned = NaN;
  cosine = NaN;
  sine = NaN;
  private readonly amplitudeHeights = new Float64Array(AMPLITUDES);
  private fixedAmplitude = NaN;

  /** Settles S, t and the prior. `fixedAmplitude` is NaN where A is drawn. The same again costs nothing. */
  settle(
    saa: number,
    sab: number,
    sbb: number,
    ta: number,
    tb: number,
    prior: AmplitudePrior,
    fixedAmplitude: number,
  ): void {
    const same =
      saa === this.saa &&
      sab === this.sab &&
      sbb === this.sbb &&
      ta === this.ta &&
      tb === this.tb &&
      samePrior(prior, this.prior) &&
      Object.is(fixedAmplitude, this.fixedAmplitude);
    if (same) return;
    this.saa = saa;
    this.sab = sab;
    this.sbb = sbb;
    this.ta = ta;
    this.tb = tb;
    Object.assign(this.prior, prior);
    this.fixedAmplitude = fixedAmplitude;
    this.laid = false;
  }

  drawPhase(rng: Rng): number {
    this.layPhases();
    const s = drawLinearDensity(this.heights, PHASES + 1, rng.uniform());
    // The turn from the middle is twice the angle of this tangent.
    const half = this.stretch * Math.tan(Math.PI * (s / PHASES - 0.5));
    const scale = 1 / (1 + half * half);
    const cosine = (1 - half * half) * scale;
    const sine = 2 * half * scale;
    const v0 = cosine * this.centreCosine - sine * this.centreSine;
    const v1 = sine * this.centreCosine + cosine * this.centreSine;
    const b = v1 / this.m11;
    const a = (v0 - this.m01 * b) / this.m00;
    return Math.atan2(-b, a);
  }

  lnPhaseDensity(phase: number): number {
    this.layPhases();
    this.turn(phase);
    const v0 = this.m00 * this.cosine - this.m01 * this.sine;
    const v1 = -this.m11 * this.sine;
    const along = v0 * this.centreCosine + v1 * this.centreSine;
    const across = v1 * this.centreCosine - v0 * this.centreSine;
    const size = Math.sqrt(v0 * v0 + v1 * v1);
    // tan of half the angle between v and the middle, in the form that doesn't cancel.
    const half = along >= 0 ? across / (size + along) : (size - along) / across;
    const tangent = Math.min(FARTHEST, Math.max(-FARTHEST, half / this.stretch));
    const s = PHASES * (Math.atan(tangent) / Math.PI + 0.5);
    const stretched = this.stretch * tangent;
    // ds → dψ → dφ.
    const psiPerNode =
      ((2 * Math.PI) / PHASES) * this.stretch * ((1 + tangent * tangent) / (1 + stretched * stretched));
    const phasePerPsi = (size * size) / (this.m00 * this.m11);
    return lnLinearDensity(this.heights, PHASES + 1, s) - Math.log(psiPerNode * phasePerPsi);
  }

  drawAmplitude(rng: Rng, phase: number): number {
    const { q, l } = this.along(phase);
    const { lo, hi } = this.prior;
    if (!this.onNodes(q, l)) return drawTruncatedNormal(rng, l / q, 1 / Math.sqrt(q), lo, hi);
    const [from, to] = this.layAmplitudes(q, l);
    const s = drawLinearDensity(this.amplitudeHeights, AMPLITUDES, rng.uniform());
    const t = from + ((to - from) * s) / (AMPLITUDES - 1);
    return this.prior.power === -1 ? Math.exp(t) : t * t;
  }

  lnAmplitudeDensity(amplitude: number, phase: number): number {
    const { q, l } = this.along(phase);
    const { lo, hi } = this.prior;
    if (!this.onNodes(q, l)) return lnTruncatedNormal(amplitude, l / q, 1 / Math.sqrt(q), lo, hi);
    const [from, to] = this.layAmplitudes(q, l);
    const logarithmic = this.prior.power === -1;
    const t = logarithmic ? Math.log(amplitude) : Math.sqrt(amplitude);
    const s = ((t - from) / (to - from)) * (AMPLITUDES - 1);
    const slope = logarithmic ? amplitude : 2 * t;
    return (
      lnLinearDensity(this.amplitudeHeights, AMPLITUDES, s) +
      Math.log((AMPLITUDES - 1) / ((to - from) * slope))
    );
  }

  /** Settles `cosine` and `sine` of a phase; the same again costs nothing. */
  turn(phase: number): void {
    if (phase === this.turned) return;
    this.turned = phase;
    this.cosine = Math.cos(phase);
    this.sine = Math.sin(phase);
  }

  private readonly line = { q: 1, l: 0 };

  /** exp(−½ q A² + l A) along a phase, the prior's normal factor included. */
  private along(phase: number): { q: number; l: number } {
    this.turn(phase);
    const a = this.cosine;
    const b = -this.sine;
    const { ownPrecision, ownMean, hi, variance } = this.prior;
    const q = this.saa * a * a + 2 * this.sab * a * b + this.sbb * b * b + ownPrecision;
    // Where neither data nor prior bound A, a floor far below either keeps the normal proper.
    const floor = Number.isFinite(hi) ? 1e-6 / (hi * hi) : 1e-6 / variance;
    this.line.q = Math.max(q, floor);
    this.line.l = this.ta * a + this.tb * b + ownPrecision * ownMean;
    return this.line;
  }

  /** True if the power of A matters: it is there, and A near its lower end is within reach. */
  private onNodes(q: number, l: number): boolean {
    return this.prior.power !== 0 && (l / q - this.prior.lo) * Math.sqrt(q) < 8;
  }

  /** Heights of the density of √A or ln A at its nodes; returns the range. */
  private layAmplitudes(q: number, l: number): [number, number] {
    const { lo, hi, power } = this.prior;
    const logarithmic = power === -1;
    // Beyond this A the normal has fallen by exp(−30) from its value at 0.
    const end = Math.min(hi, Math.max((l + Math.sqrt(l * l + 60 * q)) / q, 1.01 * lo));
    const from = logarithmic ? Math.log(lo) : Math.sqrt(lo);
    const to = logarithmic ? Math.log(end) : Math.sqrt(end);
    const best = Math.min(end, Math.max(lo, l / q));
    const peak = -0.5 * q * best * best + l * best;
    for (let k = 0; k < AMPLITUDES; k += 1) {
      const t = from + ((to - from) * k) / (AMPLITUDES - 1);
      const a = logarithmic ? Math.exp(t) : t * t;
      this.amplitudeHeights[k] = Math.exp(-0.5 * q * a * a + l * a - peak) + 1e-12;
    }
    return [from, to];
  }

  /** Whitening, middle and stretch of the phase nodes, and the heights at them. */
  private layPhases(): void {
    if (this.laid) return;
    this.laid = true;
    const { saa, sab, sbb, ta, tb, prior, heights, peaks, factors, lows, highs, fixedAmplitude } = this;
    const { lo, hi, ownMean, ownPrecision, power, variance } = prior;
    const reach = Number.isFinite(hi) ? Math.min(hi * hi, 4 * variance) : 4 * variance;
    const ridge = 1 / reach + ownPrecision;
    const held = !Number.isNaN(fixedAmplitude);
    this.m00 = Math.sqrt(saa + ridge);
    this.m01 = sab / this.m00;
    this.m11 = Math.sqrt(Math.max(ridge * 1e-3, sbb + ridge - this.m01 * this.m01));
    // Best whitened point: solve M'v = t.
    const best0 = ta / this.m00;
    const best1 = (tb - this.m01 * best0) / this.m11;
    const size = Math.sqrt(best0 * best0 + best1 * best1);
    const c0 = size > 0 ? best0 / size : 1;
    const c1 = size > 0 ? best1 / size : 0;
    this.centreCosine = c0;
    this.centreSine = c1;
    // In units of the whitened normal's width: how far out the pair is, which is how well its angle is known.
    const distance = held ? fixedAmplitude * Math.max(this.m00, this.m11) : size;
    this.stretch = Math.min(1, 1 / Math.max(distance, 1e-12));
    const { stretch } = this;
    const m01 = this.m01;
    const inverse00 = 1 / this.m00;
    const inverse11 = 1 / this.m11;
    let max = -Infinity;
    for (let k = 0; k < PHASES; k += 1) {
      // cos and sin of the turn 2 atan(stretched) from the middle, without trigonometry; node 0 is the far side.
      const tangent = HALF_TANGENTS[k];
      const stretched = stretch * tangent;
      const square = stretched * stretched;
      const scale = 1 / (1 + square);
      const cosine = k === 0 ? -1 : (1 - square) * scale;
      const sine = k === 0 ? 0 : 2 * stretched * scale;
      const e1 = (sine * c0 + cosine * c1) * inverse11;
      const e0 = (cosine * c0 - sine * c1 - m01 * e1) * inverse00;
      const square0 = e0 * e0 + e1 * e1;
      const length = Math.sqrt(square0);
      // Along the ray A = r · length the exponent is −½ q r² + l r.
      const data = saa * e0 * e0 + 2 * sab * e0 * e1 + sbb * e1 * e1;
      const q = Math.max(data + ownPrecision * square0, 1e-6);
      const l = ta * e0 + tb * e1 + ownPrecision * ownMean * length;
      // dψ/ds, which at the far side tends to 1/τ, and dφ/dψ = 1/(|M| length²).
      const turning = k === 0 ? 1 / stretch : stretch * (1 + tangent * tangent) * scale;
      if (held) {
        const r = fixedAmplitude / length;
        peaks[k] = r * (l - 0.5 * q * r);
        factors[k] = turning / square0;
      } else {
        // 1/(length √q): with it √q/length = q · inverse, and l/√q = l · length · inverse.
        const inverse = Math.sqrt(1 / (q * square0));
        const z = l * length * inverse;
        const a = lo * q * inverse - z;
        const b = hi * q * inverse - z;
        const off = a > 0 ? a : b < 0 ? b : 0;
        lows[k] = a;
        highs[k] = b;
        peaks[k] = 0.5 * (z * z - off * off);
        factors[k] = turning * inverse;
        if (power !== 0) {
          const typical = Math.min(hi, Math.max(lo, (l / q) * length, 0.5 * square0 * inverse));
          factors[k] *= power === -1 ? 1 / typical : typical ** power;
        }
      }
      if (peaks[k] > max) max = peaks[k];
    }
    let sum = 0;
    for (let k = 0; k < PHASES; k += 1) {
      const fall = peaks[k] - max;
      let height = 0;
      if (fall > -25) height = factors[k] * Math.exp(fall) * (held ? 1 : rayShape(lows[k], highs[k]));
      heights[k] = height;
      sum += height;
    }
    const floor = (1e-3 * sum) / PHASES;
    for (let k = 0; k < PHASES; k += 1) heights[k] += floor;
    heights[PHASES] = heights[0];
  }
}

function samePrior(a: AmplitudePrior, b: AmplitudePrior): boolean {
  return (
    a.lo === b.lo &&
    a.hi === b.hi &&
    a.ownMean === b.ownMean &&
    a.ownPrecision === b.ownPrecision &&
    a.power === b.power &&
    a.variance === b.variance
  );
}
