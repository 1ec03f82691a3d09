/** Builds `.worker/compute.worker.mjs` and `.worker/kernel.wasm`. */
export function buildWorker(): Promise<void>;
