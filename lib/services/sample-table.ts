import { fitBlocks, servedRows } from './fit-draws';
import { fitColumns, specOf, type FitModel } from './fit-model';
import { strideOf } from './fit-schedule';

/** All that the sample file of a fit depends on, as plain data, so that a thread can be handed it. */
export interface SampleSource {
  fitId: string;
  /** Recorded draws a replica that are committed. */
  draws: number;
  model: FitModel;
}

export interface SampleColumn {
  name: string;
  /** `count` a whole number, `flag` 0 or 1, `real` a double. */
  kind: 'count' | 'flag' | 'real';
  /** Empty for what has none, and for units that other programs would read as something else. */
  unit: string;
  description: string;
}

/** Rows of a sample file by column; the arrays are used again for the next batch. */
export interface SampleBatch {
  rows: number;
  replica: Int32Array;
  draw: Int32Array;
  warmup: Uint8Array;
  /** ln likelihood, ln prior, parameters, derived quantities. */
  reals: Float64Array[];
}

export interface SampleTable {
  columns: SampleColumn[];
  rows: number;
  /** The rows from the first on; may be asked for any number of times. */
  batches(): AsyncGenerator<SampleBatch>;
}

/** Rows of a batch. Fixed, so that no format depends on the blocks in which the draws were made. */
export const batchRows = 8_192;

const leading: readonly SampleColumn[] = [
  { name: 'replica', kind: 'count', unit: '', description: 'replica (independent chain), from 0' },
  { name: 'draw', kind: 'count', unit: '', description: 'draw, from 0 at the start of warm-up' },
  {
    name: 'warmup',
    kind: 'flag',
    unit: '',
    description: '1 for draws of warm-up, which no statistic may use',
  },
  { name: 'log_likelihood', kind: 'real', unit: '', description: 'natural logarithm of the likelihood' },
  { name: 'log_prior', kind: 'real', unit: '', description: 'natural logarithm of the joint prior density' },
];

/** The Hubble rate's letter is the henry's to a program that reads units, so only angles carry theirs. */
function described(name: string, label: string, unit: string): SampleColumn {
  const known = unit === '' || unit === 'rad';
  const description = known ? label : `${label}, in units of ${unit}`;
  return { name, kind: 'real', unit: known ? unit : '', description };
}

/**
 * The sample file of a fit as a table: replica after replica, draws in order. It holds nothing that two runs of one snapshot
 * don't share. No more than some blocks are ever in memory.
 */
export function sampleTable({ fitId, draws, model }: SampleSource): SampleTable {
  const spec = specOf(model);
  const columns = fitColumns(spec);
  const { warmup, replicas } = model.snapshot;
  const labels = new Map(
    [...spec.template.parameters, ...spec.template.derived].map(({ name, label, unit }) => [
      name,
      described(name, label, unit),
    ]),
  );
  const named = (name: string) => labels.get(name) ?? described(name, name, '');
  const kept = Math.max(0, draws - warmup);
  const each = Math.min(draws, warmup) + (kept > 0 ? Math.ceil(kept / strideOf(kept)) : 0);

  async function* batches(): AsyncGenerator<SampleBatch> {
    const { width, derived } = columns;
    const replicaOf = new Int32Array(batchRows);
    const drawOf = new Int32Array(batchRows);
    const warmupOf = new Uint8Array(batchRows);
    const reals = Array.from({ length: width + derived.length }, () => new Float64Array(batchRows));
    const computed = new Float64Array(derived.length);
    let rows = 0;
    const filled = (): SampleBatch => {
      const batch = {
        rows,
        replica: replicaOf.subarray(0, rows),
        draw: drawOf.subarray(0, rows),
        warmup: warmupOf.subarray(0, rows),
        reals: reals.map((values) => values.subarray(0, rows)),
      };
      rows = 0;
      return batch;
    };
    for (let replica = 0; replica < replicas; replica++) {
      for await (const block of fitBlocks(fitId, replica, draws)) {
        for (const { draw, row } of servedRows(block, { warmup, draws })) {
          const offset = row * width;
          columns.derive(block.values, offset, computed);
          replicaOf[rows] = replica;
          drawOf[rows] = draw;
          warmupOf[rows] = draw < warmup ? 1 : 0;
          for (let i = 0; i < width; i++) reals[i][rows] = block.values[offset + i];
          for (let i = 0; i < derived.length; i++) reals[width + i][rows] = computed[i];
          rows += 1;
          if (rows === batchRows) yield filled();
        }
      }
    }
    if (rows > 0) yield filled();
  }

  return {
    columns: [...leading, ...columns.sampled.map(named), ...columns.derived.map(named)],
    rows: replicas * each,
    batches,
  };
}
