import { parentPort, workerData } from 'node:worker_threads';
import { exactLogEvidence } from '@/lib/inference';
import { fitColumns, specOf } from '@/lib/services/fit-model';
import { evidenceInReport } from '@/lib/services/fit-moves';
import { FitModes } from '@/lib/services/fit-modes';
import { KeptDraws, lookAt } from '@/lib/services/fit-report';
import { verdict } from '@/lib/services/fit-verdict';
import { widthsOf } from '@/lib/services/fit-widths';
import { failureOf } from './failure';
import { yieldToOthers } from '@/lib/niceness';
import type { ReportAnswer, ReportQuestion, ReportSetup } from './messages';

/** A thread that remembers a fit's committed draws and computes its diagnostics, so that the main thread can renew leases. */
const port = parentPort;
if (!port) throw new Error('This file is the entry of a thread.');
yieldToOthers();
const { model, target } = workerData as ReportSetup;

const spec = specOf(model);
const columns = fitColumns(spec);
const exact = exactLogEvidence(spec);
const { warmup, replicas } = model.snapshot;
const kept = new KeptDraws(columns, warmup, replicas);
const answer = (message: ReportAnswer) => port.postMessage(message);

const modes = new FitModes(spec, model.snapshot);

port.on('message', (question: ReportQuestion) => {
  try {
    if (question.kind === 'append') {
      kept.append(question.replica, question.first, question.stride, question.values);
    } else {
      const { draws, before, facts, standing } = question;
      const scanned = modes.at(draws - warmup);
      const report = lookAt(kept, columns, { warmup, draws, target }, before, scanned);
      // A fit that goes on gets other draws: only the last look says how the evidence hangs on the prior.
      const ends = verdict(model.snapshot, report.gate.met, standing) !== null;
      const widths = ends ? widthsOf(spec, kept, draws - warmup) : null;
      answer({ kind: 'report', report: { ...report, ...evidenceInReport(facts, exact), widths } });
    }
  } catch (error) {
    answer(failureOf(error));
  }
});
