import source from './fit.worker.ts?nodeworker';

/** The engine's fit as a worker. */
export const fitWorker = (): string => source;
