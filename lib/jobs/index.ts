export { fitChannel, fitJobId, fitJobOptions, fitJobSchema, fitsQueue, fitWorkerOptions } from './fits';
export type { FitJob } from './fits';
export { scanJobSchema, scansQueue } from './scans';
export type { ScanJob } from './scans';
export { closeQueue, enqueueCheck, enqueueFit, enqueueScan } from './queue';
export { beat, endBeat, liveWorkers, workerPlaces } from './heartbeat';
