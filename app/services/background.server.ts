import { log } from "./log.server.ts";

const pending = new Set<Promise<void>>();

/**
 * Runs work that the answer must not wait for, such as what would tell a known address from an unknown one by its
 * time. A failure is logged and never ends the process.
 */
export function inBackground(what: string, work: () => Promise<void>): void {
  const running = work()
    .catch((error) => log.error({ err: error, what }, "background work failed"))
    .finally(() => pending.delete(running));
  pending.add(running);
}

/** Resolves once nothing runs in the background; the shutdown and tests wait for it. */
export async function settleBackground(): Promise<void> {
  while (pending.size > 0) await Promise.all(pending);
}
