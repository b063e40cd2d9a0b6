import { deserialize, serialize } from 'node:v8';
import { parentPort, workerData } from 'node:worker_threads';
import { buildInference } from '@/lib/inference';
import { advance, startReplica, type ReplicaState } from '@/lib/sampler';
import { specOf } from '@/lib/services/fit-model';
import { factsOf } from '@/lib/services/fit-moves';
import { samplerSettings } from '@/lib/services/fit-sampler';
import { failureOf } from './failure';
import { yieldToOthers } from '@/lib/niceness';
import type { Advance, ReplicaAnswer, ReplicaSetup } from './messages';

/** A thread that samples: it builds the posterior from plain data and advances the replicas that it is given, one at a time. */
const port = parentPort;
if (!port) throw new Error('This file is the entry of a thread.');
yieldToOthers();
const { model, states } = workerData as ReplicaSetup;
const { snapshot } = model;

const answer = (message: ReplicaAnswer, transfer: ArrayBuffer[] = []) => port.postMessage(message, transfer);

function prepare() {
  const { target, jumps, blocks } = buildInference(specOf(model));
  const settings = samplerSettings(snapshot, blocks);
  const present = new Map<number, ReplicaState>(
    [...states].map(([replica, state]) => [replica, deserialize(state) as ReplicaState]),
  );
  return (replica: number, draws: number): void => {
    const state = present.get(replica) ?? startReplica(target, jumps, settings, snapshot.seed, replica);
    const made = advance(target, jumps, settings, state, draws, undefined, () => performance.now());
    present.set(replica, made.state);
    const { first, count, width, values } = made.block;
    answer(
      {
        kind: 'turn',
        replica,
        first,
        count,
        width,
        values,
        state: serialize(made.state),
        facts: factsOf(made.state),
        milliseconds: made.milliseconds,
      },
      [values.buffer as ArrayBuffer],
    );
  };
}

let turn: ReturnType<typeof prepare> | undefined;
port.on('message', ({ replica, draws }: Advance) => {
  try {
    turn ??= prepare();
    turn(replica, draws);
  } catch (error) {
    answer(failureOf(error));
  }
});
