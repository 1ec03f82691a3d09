import { readFileSync } from "node:fs";
import { DEMO_PASSWORD, expect, test } from "./base";

/**
 * What the other browser tests typed, took in or were given, and the log must not hold: passwords, addresses and names
 * of people, names of compounds and files, atoms of structures, secrets of links and tokens.
 */
const MARKERS = [
  DEMO_PASSWORD,
  "seven brown kettles",
  "not the right one",
  "@lab.example",
  "@lowlying.example",
  "Ada Quist",
  "no-such-link",
  "lowl_",
  "lowlying-3",
  "difluoroethane",
  "ac-ala",
  "aminoester",
  "tosylamide",
];

test("the server's log is JSON and holds no secrets, names or structures (security G01)", async () => {
  const lines = readFileSync(process.env.E2E_LOG ?? "", "utf8")
    .trimEnd()
    .split("\n");
  // Words for the person at the terminal, before the first request.
  const said = lines.filter((line) => !line.startsWith("{"));
  expect(said.length).toBeLessThan(10);
  const entries = lines
    .filter((line) => line.startsWith("{"))
    .map((line) => JSON.parse(line) as Record<string, unknown>);
  expect(entries.length).toBeGreaterThan(50);
  const requests = entries.filter((entry) => entry.msg === "request");
  for (const entry of requests) expect(entry.requestId).toMatch(/^[0-9a-f]{16}$/);
  const text = lines.filter((line) => line.startsWith("{")).join("\n");
  expect(MARKERS.filter((marker) => text.toLowerCase().includes(marker.toLowerCase()))).toEqual([]);
  // Nothing failed that the tests did not see.
  expect(entries.filter((entry) => entry.msg === "unexpected failure")).toEqual([]);
});
