/** Builds `.worker/compute.worker.mjs`. */
export function buildWorker(): Promise<void>;
