import { parentPort, workerData } from 'node:worker_threads';
import { fitColumns, specOf } from '@/lib/services/fit-model';
import { KeptDraws, lookAt } from '@/lib/services/fit-report';
import { failureOf } from './failure';
import { yieldToOthers } from './niceness';
import type { ReportAnswer, ReportQuestion, ReportSetup } from './messages';

/** A thread that remembers a fit's committed draws and computes its diagnostics, so that the main thread can renew leases. */
const port = parentPort;
if (!port) throw new Error('This file is the entry of a thread.');
yieldToOthers();
const { model, target } = workerData as ReportSetup;

const columns = fitColumns(specOf(model));
const { warmup, replicas } = model.snapshot;
const kept = new KeptDraws(columns, warmup, replicas);
const answer = (message: ReportAnswer) => port.postMessage(message);

port.on('message', (question: ReportQuestion) => {
  try {
    if (question.kind === 'append') {
      kept.append(question.replica, question.first, question.stride, question.values);
    } else {
      const report = lookAt(kept, columns, { warmup, draws: question.draws, target }, question.before);
      answer({ kind: 'report', report });
    }
  } catch (error) {
    answer(failureOf(error));
  }
});
