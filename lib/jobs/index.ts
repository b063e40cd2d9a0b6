export { fitChannel, fitJobId, fitJobOptions, fitJobSchema, fitsQueue, fitWorkerOptions } from './fits';
export type { FitJob } from './fits';
export { closeQueue, enqueueFit } from './queue';
export { beat, endBeat, liveWorkers, workerPlaces } from './heartbeat';
