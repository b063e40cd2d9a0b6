import { parentPort, workerData } from 'node:worker_threads';
import { checkProblem, checkResult, rankBlock, type CheckModel } from '@/lib/services/check-model';
import { failureOf } from './failure';
import { yieldToOthers } from '@/lib/niceness';
import type { CheckAnswer, CheckQuestion } from './messages';

/** A thread that ranks simulated data sets, a block at a time. */
const port = parentPort;
if (!port) throw new Error('This file is the entry of a thread.');
yieldToOthers();
const model = workerData as CheckModel;
const answer = (message: CheckAnswer) => port.postMessage(message);

let problem: ReturnType<typeof checkProblem> | undefined;
port.on('message', (question: CheckQuestion) => {
  try {
    if (question.kind === 'result') {
      answer({ kind: 'result', result: checkResult(question.found, model.request) });
      return;
    }
    problem ??= checkProblem(model);
    const { first } = question;
    answer({ kind: 'block', first, found: rankBlock(problem, model.request, first) });
  } catch (error) {
    answer(failureOf(error));
  }
});
