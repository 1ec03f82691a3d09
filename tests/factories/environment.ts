import { vi } from "vitest";
import * as environment from "~/env.server";

/** Other settings for one test; the runner puts them back after it. */
export function withEnv(change: Partial<environment.Env>): void {
  const real = environment.env();
  // why: settings are read once a process; a test of another setting must not leak into the next.
  vi.spyOn(environment, "env").mockReturnValue({ ...real, ...change });
}
