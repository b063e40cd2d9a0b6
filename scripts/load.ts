import { writeFileSync } from 'node:fs';
import { availableParallelism } from 'node:os';
import path from 'node:path';
import { parseArgs } from 'node:util';
import { z } from 'zod';
import { closeDatabase } from '@/lib/db';
import { takeInstanceEnvironment } from './instance-environment';
import { tableOf } from './load/measures';
import { runLoad } from './load/run-load';

/**
 * `npm run load -- [--viewers 50] [--queued 20] [--seconds 60] [--think 15] [--json FILE]`: puts the instance that runs in
 * BEATNOTE_STATE under load, prints how fast it answered and what that cost its web server, workers and database, and ends with 1
 * where a target is missed. Viewers load the page anew every `think` seconds on the average, between two thirds and four thirds of it.
 */

const count = z.coerce.number<string>().int().min(1);
const { values } = parseArgs({
  options: {
    viewers: { type: 'string', default: '50' },
    queued: { type: 'string', default: '20' },
    seconds: { type: 'string', default: '60' },
    think: { type: 'string', default: '15' },
    patience: { type: 'string', default: '600' },
    json: { type: 'string' },
  },
});
takeInstanceEnvironment();
const origin = process.env.BEATNOTE_URL;
if (!origin) {
  process.stderr.write('No instance runs in BEATNOTE_STATE. Start one first.\n');
  process.exit(1);
}

/** What is wanted: pages in milliseconds at the 95th percentile, lag from commit to viewer, draws, processor time of a page. */
const targets = { page: 500, lag: 2_000, lost: 0, cost: 150 } as const;

const report = await runLoad({
  origin,
  state: path.resolve(process.env.BEATNOTE_STATE ?? '.state'),
  viewers: count.parse(values.viewers),
  queued: count.parse(values.queued),
  seconds: count.parse(values.seconds),
  think: count.parse(values.think),
  patience: count.parse(values.patience),
  say: (line) => process.stderr.write(`${line}\n`),
});
const { answers, events, fits, draws, cost, busy, loadAverage } = report;
const met = {
  page: (answers.page.p95 ?? Infinity) < targets.page,
  lag: (answers.lag.p95 ?? Infinity) < targets.lag,
  lost: draws.lost === targets.lost,
  cost: cost.page < targets.cost,
};
const shares = Object.entries(busy).map(([part, share]) => `${part} ${(100 * share).toFixed(0)} %`);
const costs = Object.entries(cost).map(([name, each]) => `${name} ${each.toFixed(1)} ms`);
process.stdout.write(
  [
    tableOf(answers),
    '',
    `Processor time of the web server: ${costs.join(', ')}; a core serves ${(1000 / cost.page).toFixed(1)} pages a second`,
    `While the viewers looked, of one core: ${shares.join(', ')}; load average of the machine ${loadAverage.map((each) => each.toFixed(1)).join(' to ')}`,
    `${events.heard} events heard, ${events.backwards} of them backwards`,
    `${fits.ended} queued fits ended by themselves, ${fits.stopped} were stopped`,
    `${draws.committed} draws committed, ${draws.found} found, ${draws.lost} lost`,
    '',
    ...Object.entries(met).map(([name, good]) => `${name.padEnd(5)} ${good ? 'met' : 'missed'}`),
    '',
  ].join('\n'),
);
const machine = { processors: availableParallelism(), node: process.version, at: new Date().toISOString() };
if (values.json)
  writeFileSync(values.json, `${JSON.stringify({ ...report, targets, met, machine }, null, 2)}\n`);
await closeDatabase();
process.exit(Object.values(met).every(Boolean) ? 0 : 1);
