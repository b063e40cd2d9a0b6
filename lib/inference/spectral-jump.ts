import type { JumpProposal, Rng } from '@/lib/sampler';
import { AmplitudeEvidence } from './amplitude-evidence';
import { mixedAmplitudes, polarAmplitudes } from './amplitude-maps';
import { FieldSystem, type FieldStage, type MassEvidence } from './field-system';
import { LooseEvidence } from './loose-evidence';
import type { Metric } from './metric';
import {
  lineProposal,
  noMasses,
  OneMassProposal,
  planeProposal,
  type MassProposal,
  type MassProposalSettings,
} from './mass-proposal';
import { EitherMassProposal, latticeProposal } from './mass-lattice';
import { singleGain } from './greedy-gain';
import { cellCentres } from './mass-grid';
import { PairEvidence } from './pair-evidence';
import { scalarPriorOf, type ParameterLayout } from './parameter-layout';
import { productProposal } from './product-proposal';
import { referenceModel } from './reference-model';
import { MixingStage } from './stage-mixing';
import { PolarStage } from './stage-polar';
import { QuadratureStage } from './stage-quadrature';
import { VertexAngleStage } from './stage-vertex-angle';
import { buildCoefficients, buildDrawPrior, buildLogPrior, fillIn } from './target';
import type { WhitenedField } from './whitened-field';
import type { WhitenedData } from './whitening';

/** Part of the jumps that draws every parameter from the prior. */
const FLOOR = 0.02;
const LN_FLOOR = Math.log(FLOOR);
const LN_REST = Math.log1p(-FLOOR);

/**
 * The spectral jump: masses from a fixed proposal made of the collapsed evidence, then the fields' other parameters, then
 * the background, each from its conditional under the reference model. What is fixed, and the vertex angle of a mixture, is
 * conditioned on. The density is exact for what is drawn, so the Hastings ratio corrects every approximation.
 *
 * A small part is drawn from the prior, so that target/proposal is nowhere above likelihood/part: a chain that starts where
 * the likelihood is poor, or a t likelihood's tail wider than its reference, can't hold it.
 */
class SpectralJump implements JumpProposal {
  readonly name = 'spectral-jump';
  /** Three or more masses are redrawn one at a time, given the others: no density of the end point alone. */
  readonly normalised: boolean;
  private readonly full: Float64Array;
  private readonly before: Float64Array;
  private readonly coefficients: Float64Array;
  private readonly writeCoefficients: (full: Float64Array, out: Float64Array) => void;
  // What depends on the end point alone is kept for the last few: the density of the rest given the masses, and that of the masses
  // unless one is redrawn given the others.
  private readonly keptPoints: Float64Array[];
  private readonly keptOwn: Float64Array;
  private readonly keptPrior: Float64Array;
  private readonly drawPrior: (rng: Rng, full: Float64Array) => void;
  private readonly logPrior: (full: Float64Array) => number;
  private next = 0;

  constructor(
    private readonly layout: ParameterLayout,
    private readonly masses: MassProposal,
    private readonly system: FieldSystem,
    private readonly stage: FieldStage | null,
  ) {
    this.normalised = layout.masses.filter((index) => layout.position[index] >= 0).length <= 2;
    this.full = Float64Array.from(layout.base);
    this.writeCoefficients = buildCoefficients(layout);
    this.before = Float64Array.from(layout.base);
    this.coefficients = new Float64Array(layout.template.columnCount);
    this.keptPoints = Array.from({ length: 4 }, () => new Float64Array(layout.free.length).fill(NaN));
    this.keptOwn = new Float64Array(4);
    this.keptPrior = new Float64Array(4);
    this.drawPrior = buildDrawPrior(layout);
    this.logPrior = buildLogPrior(layout);
  }

  draw(rng: Rng, from: Float64Array, out: Float64Array): void {
    const { layout, full, system } = this;
    fillIn(layout, from, full);
    if (rng.uniform() < FLOOR) this.drawPrior(rng, full);
    else {
      this.masses.draw(rng, full);
      this.loadFields();
      this.stage?.draw(rng, system, full);
      this.writeCoefficients(full, this.coefficients);
      system.model.drawBackground(rng, system.moments, this.coefficients, full);
    }
    for (let i = 0; i < layout.free.length; i += 1) out[i] = full[layout.free[i]];
  }

  logDensity(to: Float64Array, from: Float64Array): number {
    const { layout, full, before } = this;
    const kept = this.keep(to);
    let own = this.keptOwn[kept];
    if (!this.normalised) {
      fillIn(layout, to, full);
      fillIn(layout, from, before);
      own += this.masses.logDensity(full, before);
    }
    const floor = LN_FLOOR + this.keptPrior[kept];
    const drawn = own + LN_REST;
    const larger = drawn > floor ? drawn : floor;
    if (larger === -Infinity) return larger;
    return larger + Math.log1p(Math.exp((drawn > floor ? floor : drawn) - larger));
  }

  /** Where what hangs on the end point alone is kept: the proposal's own density and the prior's. */
  private keep(to: Float64Array): number {
    const { full, system, keptPoints } = this;
    for (let k = 0; k < keptPoints.length; k += 1) if (samePoint(keptPoints[k], to)) return k;
    fillIn(this.layout, to, full);
    this.loadFields();
    let rest = this.stage ? this.stage.logDensity(system, full) : 0;
    this.writeCoefficients(full, this.coefficients);
    rest += system.model.lnBackgroundDensity(system.moments, this.coefficients, full);
    if (this.normalised) rest += this.masses.logDensity(full, full);
    const slot = this.next;
    this.next = (slot + 1) % keptPoints.length;
    for (let i = 0; i < to.length; i += 1) keptPoints[slot][i] = to[i];
    this.keptOwn[slot] = Number.isNaN(rest) ? -Infinity : rest;
    this.keptPrior[slot] = this.logPrior(full);
    return slot;
  }

  private readonly massOf = (f: number): number => this.full[this.layout.masses[f]];

  private loadFields(): void {
    this.system.load(this.massOf);
  }
}

function samePoint(a: Float64Array, b: Float64Array): boolean {
  for (let i = 0; i < a.length; i += 1) if (a[i] !== b[i]) return false;
  return true;
}

function stageOf(layout: ParameterLayout, first: number): FieldStage | null {
  const inner = stageAtVertex(layout, first);
  const { vertexAngle, position } = layout;
  return inner && vertexAngle >= 0 && position[vertexAngle] >= 0
    ? new VertexAngleStage(layout, inner)
    : inner;
}

/** The stage of the fields' parameters but for a sampled vertex angle. */
function stageAtVertex(layout: ParameterLayout, first: number): FieldStage | null {
  switch (layout.template.structure) {
    case 'background':
      return null;
    case 'linear':
      return new QuadratureStage(layout);
    case 'polar':
      return new PolarStage(polarAmplitudes(layout), layout.masses.length, first);
    case 'mixed-polar':
      return new PolarStage(mixedAmplitudes(layout), layout.masses.length, first);
    case 'mixed':
      return new MixingStage(layout);
  }
}

/** What the masses' grid is made of: the stage's own evidence, unless that costs too much. */
function massEvidence(layout: ParameterLayout, stage: FieldStage): MassEvidence {
  const { template, masses, vertexAngle, coupling } = layout;
  const vertex = vertexAngle >= 0 ? scalarPriorOf(layout, vertexAngle) : null;
  if (template.structure === 'mixed' && masses.length > 2) {
    return vertex ? new LooseEvidence(layout) : new AmplitudeEvidence(layout);
  }
  const coupled = vertex && template.structure === 'mixed' ? scalarPriorOf(layout, coupling) : null;
  return vertex && coupled ? new PairEvidence(layout, coupled, vertex) : stage;
}

/** Whether the stage's evidence is cheap enough for a lattice of three masses, and smooth enough to gain by it. */
function onLattice({ template, masses, vertexAngle, position }: ParameterLayout): boolean {
  if (masses.length > 3 || (vertexAngle >= 0 && position[vertexAngle] >= 0)) return false;
  return template.structure === 'linear' || template.structure === 'mixed';
}

/** How sharp the proposal of the masses may be: nearly the evidence itself where that is exact. */
function massSettings(
  layout: ParameterLayout,
  stage: FieldStage,
  metric: Pick<Metric, 'parts'>,
): MassProposalSettings {
  const near =
    layout.template.structure === 'polar' ||
    (stage.exact && metric.parts.every(({ likelihood }) => likelihood.exponent === null));
  return {
    temper: near ? 0.9 : 1 / 1.5,
    floor: 0.05,
    explorer: layout.template.structure === 'mixed' ? new LooseEvidence(layout) : null,
  };
}

/** The spectral jump of a posterior, made with its reference model. */
export function buildSpectralJump(
  layout: ParameterLayout,
  metric: Metric<WhitenedData>,
  fields: readonly WhitenedField[],
  background: Float64Array,
): JumpProposal {
  const model = referenceModel(layout, metric, fields, background);
  const system = new FieldSystem(model, fields.length);
  const stage = stageOf(layout, model.first);
  if (!stage) return new SpectralJump(layout, noMasses, system, null);
  const grids = new FieldSystem(model, fields.length);
  const settings = massSettings(layout, stage, metric);
  const evidence = massEvidence(layout, stage);
  const sampled = layout.masses.flatMap((index, f) => (layout.position[index] >= 0 ? [f] : []));
  let masses: MassProposal;
  if (sampled.length === 0) masses = noMasses;
  else if (sampled.length === 1) masses = lineProposal(layout, grids, evidence, sampled[0], settings);
  else if (sampled.length === 2) {
    masses = planeProposal(layout, grids, evidence, [sampled[0], sampled[1]], settings);
  } else if (!layout.massOrder.ascending) {
    masses = productProposal(layout, sampled, (f, mass) => singleGain(model, f, mass), settings);
  } else {
    masses = new OneMassProposal(layout, grids, evidence, settings, (edges) =>
      cellCentres(edges).map((mass) => singleGain(model, 0, mass)),
    );
    if (sampled.length === 3 && onLattice(layout)) {
      const lattice = new FieldSystem(model, fields.length);
      masses = new EitherMassProposal(latticeProposal(layout, lattice, stage, sampled, settings), masses);
    }
  }
  return new SpectralJump(layout, masses, system, stage);
}
