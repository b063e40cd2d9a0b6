import { Fit } from '@/models';
import { AppError, notFound } from '@/lib/errors';
import { endedStatuses, fitStatusSchema, type DrawsHead } from '@/lib/schemas';
import type { Access } from './access';
import { fitBlocks, servedRows } from './fit-draws';
import { fitColumns, fitModel, specOf, type FitColumns } from './fit-model';
import { findDraws } from './fit-records';
import { strideOf } from './fit-schedule';
import { isBlindVersion } from './version-lines';

/**
 * Draws for figures. A page asks for them every few seconds while a fit runs, and so does every other page that shows it: the
 * thinned draws are kept in this process, of a running fit only what is new is read, and one answer serves all who ask at
 * about the same time.
 */

/** Draws thinned evenly for figures: replica after replica, in order; never changed once they are given out. */
export interface ThinnedDraws {
  head: DrawsHead;
  /** Recorded draw of each row, counted from 0 at the start of warm-up. */
  draw: number[];
  logLikelihood: number[];
  /** One array a column of the head, in its order. */
  values: number[][];
}

interface Rows {
  draw: number[];
  logLikelihood: number[];
  /** By column: sampled, then derived. */
  values: number[][];
}

interface Thinned {
  /** Recorded draws a replica that were looked at. */
  draws: number;
  stride: number;
  replicas: Rows[];
}

interface Entry {
  columns: FitColumns;
  warmup: number;
  thinned: Thinned;
  /** Made after the fit had ended. */
  ended: boolean;
  answer: ThinnedDraws;
  /** Milliseconds of the process's clock at which the answer was made. */
  at: number;
}

/** How old an answer of a running fit may be: less than half of the time after which a page asks again. */
const freshFor = 2_000;
/** Answers that are kept; the one that was used longest ago goes first. */
const keptAnswers = 32;

const entries = new Map<string, Entry>();
const making = new Map<string, Promise<Entry>>();

const emptyRows = (columns: FitColumns): Rows => ({
  draw: [],
  logLikelihood: [],
  values: [...columns.sampled, ...columns.derived].map(() => []),
});

const offsetIn = (draw: number, warmup: number): number => (draw < warmup ? draw : draw - warmup);

/** Rows of one replica when every `stride`-th of `draws` recorded ones is taken. */
function countAt(draws: number, warmup: number, stride: number): number {
  return Math.ceil(Math.min(draws, warmup) / stride) + Math.ceil(Math.max(0, draws - warmup) / stride);
}

/** Adds what was drawn since to the rows, on their stride. */
async function append(
  fitId: string,
  thinned: Thinned,
  draws: number,
  entry: Pick<Entry, 'columns' | 'warmup'>,
) {
  const { columns, warmup } = entry;
  const derived = new Float64Array(columns.derived.length);
  for (const [replica, rows] of thinned.replicas.entries()) {
    for await (const block of fitBlocks(fitId, replica, draws, thinned.draws)) {
      for (const { draw, row } of servedRows(block, { warmup, draws })) {
        if (draw < thinned.draws || offsetIn(draw, warmup) % thinned.stride !== 0) continue;
        const offset = row * block.width;
        columns.derive(block.values, offset, derived);
        rows.draw.push(draw);
        rows.logLikelihood.push(block.values[offset]);
        columns.sampled.forEach((_, i) => rows.values[i].push(block.values[offset + 2 + i]));
        derived.forEach((value, i) => rows.values[columns.sampled.length + i].push(value));
      }
    }
  }
  thinned.draws = draws;
}

/** The same draws on a coarser stride, a multiple of their own. */
function coarser(thinned: Thinned, stride: number, warmup: number): Thinned {
  if (stride === thinned.stride) return thinned;
  const replicas = thinned.replicas.map(({ draw, logLikelihood, values }): Rows => {
    const stays = (_: number, i: number) => offsetIn(draw[i], warmup) % stride === 0;
    return {
      draw: draw.filter(stays),
      logLikelihood: logLikelihood.filter(stays),
      values: values.map((column) => column.filter(stays)),
    };
  });
  return { ...thinned, stride, replicas };
}

/**
 * Step between the draws given. Of a running fit it only doubles, so that what was read stays of use; of an ended one it is the
 * smallest multiple of the stored step that keeps within `max`.
 */
function strideFor(draws: number, warmup: number, replicas: number, max: number, ended: boolean): number {
  const stored = strideOf(draws - warmup);
  let stride = stored;
  while (replicas * countAt(draws, warmup, stride) > max && stride < draws) {
    stride = ended ? stride + stored : stride * 2;
  }
  return stride;
}

function answerOf({ columns, warmup, thinned }: Pick<Entry, 'columns' | 'warmup' | 'thinned'>): ThinnedDraws {
  const { replicas, stride } = thinned;
  const names = [...columns.sampled, ...columns.derived];
  const rows = replicas.map(({ draw }) => draw.length);
  return {
    head: { replicas: replicas.length, stride, warmup, rows, columns: names },
    draw: replicas.flatMap(({ draw }) => draw),
    logLikelihood: replicas.flatMap(({ logLikelihood }) => logLikelihood),
    values: names.map((_, i) => replicas.flatMap(({ values }) => values[i])),
  };
}

async function make(access: Access, max: number, before: Entry | undefined): Promise<Entry> {
  const source = await findDraws(access);
  const { fit, snapshot } = source;
  const { warmup, replicas } = snapshot;
  const columns = before?.columns ?? fitColumns(specOf(fitModel(source.numbers, snapshot)));
  const ended = endedStatuses.includes(fitStatusSchema.parse(fit.status));
  const stride = strideFor(fit.draws, warmup, replicas, max, ended);
  const useful = before && before.thinned.draws <= fit.draws && stride % before.thinned.stride === 0;
  const thinned: Thinned = useful
    ? { ...coarser(before.thinned, stride, warmup) }
    : { draws: 0, stride, replicas: Array.from({ length: replicas }, () => emptyRows(columns)) };
  await append(fit.id, thinned, fit.draws, { columns, warmup });
  const answer = answerOf({ columns, warmup, thinned });
  return { columns, warmup, thinned, ended, answer, at: performance.now() };
}

/** One maker at a time for an answer; whoever asks meanwhile gets what it makes. */
async function made(key: string, access: Access, max: number): Promise<Entry> {
  const running = making.get(key);
  if (running) return running;
  const promise = make(access, max, entries.get(key));
  making.set(key, promise);
  try {
    const entry = await promise;
    entries.delete(key);
    entries.set(key, entry);
    if (entries.size > keptAnswers) entries.delete(entries.keys().next().value!);
    return entry;
  } catch (error) {
    // Rows that were half added are of no use.
    entries.delete(key);
    throw error;
  } finally {
    making.delete(key);
  }
}

/** Draws of the fit of `access` for figures, at most `max` of all replicas together; `blind` while its measurement is. */
export async function thinnedDraws(access: Access, max: number): Promise<ThinnedDraws> {
  access.require('fit.read');
  const fit = await Fit.findByPk(access.id, {
    attributes: ['id', 'status', 'draws', 'measurementVersionId'],
  });
  if (!fit) throw notFound('fit');
  if (await isBlindVersion(fit.measurementVersionId)) {
    throw new AppError('blind', 'The measurement is blind: its draws can’t be read before it is unblinded.');
  }
  const key = `${fit.id} ${max}`;
  const known = entries.get(key);
  if (known) {
    const ended = endedStatuses.includes(fitStatusSchema.parse(fit.status));
    const recent = !ended && performance.now() - known.at < freshFor;
    if (recent || (known.ended === ended && known.thinned.draws === fit.draws)) return known.answer;
  }
  return (await made(key, access, max)).answer;
}
