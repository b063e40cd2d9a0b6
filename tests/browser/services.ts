import type { TestProject } from 'vitest/node';
import { StartedInstance, type RunningInstance } from './instance';

declare module 'vitest' {
  export interface ProvidedContext {
    instance: RunningInstance;
  }
}

/** One instance for all browser tests of a run. */
export default async function setup(project: TestProject) {
  const instance = await StartedInstance.start();
  project.provide('instance', instance.facts);
  return async () => {
    await instance.stop();
    instance.removeState();
  };
}
