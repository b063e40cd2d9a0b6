import { readFileSync } from 'node:fs';
import path from 'node:path';
import type { TestProject } from 'vitest/node';
import { freshLinks, StartedInstance, type RunningInstance } from './instance';

declare module 'vitest' {
  export interface ProvidedContext {
    instance: RunningInstance;
  }
}

/** An instance that runs already, by its state folder: for whoever writes these tests. */
function running(state: string): RunningInstance {
  const environment = JSON.parse(readFileSync(path.join(state, 'instance.json'), 'utf8')) as Record<
    string,
    string
  >;
  return { url: environment.BEATNOTE_URL, state, links: freshLinks(state), secondsToReady: 0 };
}

/** One instance for all browser tests of a run. */
export default async function setup(project: TestProject) {
  const known = process.env.BEATNOTE_TEST_STATE;
  if (known) {
    project.provide('instance', running(path.resolve(known)));
    return;
  }
  const instance = await StartedInstance.start();
  project.provide('instance', instance.facts);
  return async () => {
    await instance.stop();
    instance.removeState();
  };
}
