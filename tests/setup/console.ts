import { afterEach, beforeEach, expect, vi } from "vitest";

// What is written to the console in a test is something that nobody reads: it fails the test instead. A test that
// expects a message says so with a spy of its own.
const spies: { mock: { calls: unknown[][] }; mockRestore: () => void }[] = [];

beforeEach(() => {
  for (const method of ["error", "warn"] as const) {
    spies.push(vi.spyOn(console, method).mockImplementation(() => {}));
  }
});

afterEach(() => {
  const calls = spies.splice(0).flatMap((spy) => {
    const seen = [...spy.mock.calls];
    spy.mockRestore();
    return seen;
  });
  expect(calls, "console.error and console.warn stay silent").toEqual([]);
});
