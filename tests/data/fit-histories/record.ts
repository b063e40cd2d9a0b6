/** Records how fits converge: `node --import tsx tests/data/fit-histories/record.ts FOLDER [NAME]`; a file a fit. */
import { writeFileSync } from 'node:fs';
import path from 'node:path';
import { buildInference, type InferenceSpec } from '@/lib/inference';
import { judgeModes, modeTable, scanModes } from '@/lib/inference/scan';
import { advance, diagnose, startReplica } from '@/lib/sampler';
import { fitColumns } from '@/lib/services/fit-model';
import { KeptDraws } from '@/lib/services/fit-report';
import { samplerOfNewFits, samplerSettings } from '@/lib/services/fit-sampler';
import { blockDraws, isLook, judgedFrom, warmupDraws } from '@/lib/services/fit-schedule';
import { compileTemplate, type Prior } from '@/lib/templates';
import { measurement } from '../../lib/inference/measured';
import type { FitHistory } from './read';

interface Recipe {
  name: string;
  file: 'one-field' | 'two-field';
  id: string;
  options: Record<string, unknown>;
  replaced?: Record<string, Prior>;
  kappaMax?: number;
  replicas?: number;
  seed: string;
  kept: number;
}

const background = [1, 2];
const recipes: Recipe[] = [
  { name: 'background', file: 'one-field', id: 'background', options: { background }, seed: 'h1', kept: 16_000 },
  { name: 'background-of-five', file: 'two-field', id: 'background', options: { background: [-1, 0, 1, 2, 3] }, replicas: 2, seed: 'h2', kept: 16_000 },
  { name: 'one-field', file: 'one-field', id: 'free-phase', options: { fields: 1, background }, seed: 'h3', kept: 24_000 },
  { name: 'one-field-again', file: 'one-field', id: 'free-phase', options: { fields: 1, background }, seed: 'h4', kept: 24_000 },
  { name: 'one-field-little-data', file: 'two-field', id: 'free-phase', options: { fields: 1, background }, kappaMax: 0.06, seed: 'h5', kept: 24_000 },
  { name: 'two-fields', file: 'two-field', id: 'free-phase', options: { fields: 2, background }, seed: 'h6', kept: 24_000 },
  { name: 'one-field-on-two', file: 'two-field', id: 'free-phase', options: { fields: 1, background }, replicas: 6, seed: 'h7', kept: 16_000 },
  { name: 'locked-one', file: 'one-field', id: 'locked-squeezed', options: { fields: 1, vertex: 2, background: [1, 2, 3] }, seed: 'h8', kept: 24_000 },
  { name: 'locked-one-two-replicas', file: 'one-field', id: 'locked-squeezed', options: { fields: 1, vertex: 2, background }, replicas: 2, seed: 'h9', kept: 24_000 },
  { name: 'locked-two', file: 'two-field', id: 'locked-squeezed', options: { fields: 2, vertex: 2, background: [1, 2, 3] }, seed: 'h10', kept: 24_000 },
  { name: 'locked-two-again', file: 'two-field', id: 'locked-squeezed', options: { fields: 2, vertex: 2, background }, seed: 'h11', kept: 24_000 },
  { name: 'two-fields-little-data', file: 'one-field', id: 'free-phase', options: { fields: 2, background }, kappaMax: 0.08, seed: 'h12', kept: 24_000 },
  { name: 'narrow-cut', file: 'one-field', id: 'free-phase', options: { fields: 1, background: [1] }, kappaMax: 0.1, replicas: 8, seed: 'h13', kept: 10_000 },
  { name: 'locked-two-third', file: 'two-field', id: 'locked-squeezed', options: { fields: 2, vertex: 2, background }, seed: 'h14', kept: 24_000 },
  { name: 'locked-two-fourth', file: 'two-field', id: 'locked-squeezed', options: { fields: 2, vertex: 2, background: [1, 2, 3] }, seed: 'h15', kept: 24_000 },
  { name: 'locked-two-fifth', file: 'two-field', id: 'locked-squeezed', options: { fields: 2, vertex: 2, background }, seed: 'h16', kept: 24_000 },
  { name: 'two-fields-again', file: 'two-field', id: 'free-phase', options: { fields: 2, background }, seed: 'h17', kept: 24_000 },
  { name: 'background-again', file: 'one-field', id: 'background', options: { background }, seed: 'h18', kept: 16_000 },
  // With seeds of their own, recorded later; in sight when the last of the estimator's constants was chosen on those above.
  { name: 'after-background', file: 'one-field', id: 'background', options: { background }, seed: 'k1', kept: 16_000 },
  { name: 'after-one-field', file: 'one-field', id: 'free-phase', options: { fields: 1, background }, seed: 'k2', kept: 16_000 },
  { name: 'after-one-field-little-data', file: 'two-field', id: 'free-phase', options: { fields: 1, background }, kappaMax: 0.06, seed: 'k3', kept: 16_000 },
  { name: 'after-two-fields', file: 'two-field', id: 'free-phase', options: { fields: 2, background }, seed: 'k4', kept: 16_000 },
  { name: 'after-two-fields-little-data', file: 'one-field', id: 'free-phase', options: { fields: 2, background }, kappaMax: 0.08, seed: 'k5', kept: 16_000 },
  { name: 'after-locked-one', file: 'one-field', id: 'locked-squeezed', options: { fields: 1, vertex: 2, background: [1, 2, 3] }, seed: 'k6', kept: 16_000 },
  { name: 'after-locked-two', file: 'two-field', id: 'locked-squeezed', options: { fields: 2, vertex: 2, background }, seed: 'k7', kept: 24_000 },
  { name: 'after-locked-two-again', file: 'two-field', id: 'locked-squeezed', options: { fields: 2, vertex: 2, background: [1, 2, 3] }, seed: 'k8', kept: 24_000 },
  { name: 'after-locked-two-third', file: 'two-field', id: 'locked-squeezed', options: { fields: 2, vertex: 2, background }, seed: 'k9', kept: 24_000 },
  { name: 'after-narrow-cut', file: 'one-field', id: 'free-phase', options: { fields: 1, background: [1] }, kappaMax: 0.1, replicas: 8, seed: 'k10', kept: 10_000 },
];

const rounded = (value: number) => (Number.isFinite(value) ? Number(value.toPrecision(5)) : null);

function specOf({ file, id, options, replaced = {}, kappaMax = 0.2 }: Recipe): InferenceSpec {
  const { axis, data } = measurement(file, kappaMax);
  const template = compileTemplate(id, options, axis);
  const priors = Object.fromEntries(
    template.parameters.map((p) => [p.name, replaced[p.name] ?? p.defaultPrior]),
  );
  return { data, likelihood: 'matched-t', template, priors };
}

function record(recipe: Recipe): FitHistory {
  const { name, seed, kept: last, replicas = 4 } = recipe;
  const spec = specOf(recipe);
  const columns = fitColumns(spec);
  const { target, jumps, blocks } = buildInference(spec);
  const settings = samplerSettings({ warmup: warmupDraws, sampler: samplerOfNewFits }, blocks);
  const masses = spec.template.parameters.filter(({ role }) => role === 'mass').map((each) => each.name);
  const scan = masses.length > 0 && masses.length <= 2 ? scanModes(spec, seed) : null;
  const draws = new KeptDraws(columns, warmupDraws, replicas);
  const states = Array.from({ length: replicas }, (_, k) => {
    const start = startReplica(target, jumps, settings, seed, k);
    return advance(target, jumps, settings, start, warmupDraws).state;
  });
  const history: FitHistory = { name, replicas, warmup: warmupDraws, quantities: [], looks: [] };
  for (let kept = blockDraws; kept <= last; kept += blockDraws) {
    states.forEach((state, k) => {
      const made = advance(target, jumps, settings, state, blockDraws);
      states[k] = made.state;
      draws.append(k, made.block.first, 1, made.block.values);
    });
    if (!isLook(kept, blockDraws)) continue;
    const chains = draws.chains(kept);
    const found = [...chains].map(([quantity, each]) => ({ quantity, diagnosis: diagnose(each) }));
    const judged = found.filter(
      ({ quantity, diagnosis }) => !(columns.derived.includes(quantity) && diagnosis.constant),
    );
    const apart =
      scan && kept >= judgedFrom
        ? judgeModes(scan, modeTable(scan, masses.map((mass) => chains.get(mass) ?? []))).length > 0
        : false;
    history.quantities = judged.map(({ quantity }) => quantity);
    history.looks.push({
      kept,
      rhat: judged.map(({ diagnosis }) => rounded(diagnosis.rhat)),
      ess: judged.map(({ diagnosis }) => rounded(Math.min(diagnosis.essBulk, diagnosis.essTail))),
      apart,
    });
  }
  return history;
}

const [folder, only] = process.argv.slice(2);
for (const recipe of recipes.filter(({ name }) => only === undefined || only.split(',').includes(name))) {
  const begun = performance.now();
  writeFileSync(path.join(folder, `${recipe.name}.json`), `${JSON.stringify(record(recipe))}\n`);
  process.stdout.write(`${recipe.name}: ${Math.round((performance.now() - begun) / 1000)} s\n`);
}
