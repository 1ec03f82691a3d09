import { expect, it } from "vitest";
import { countingProperties, signalRows } from "./signals.ts";

const figures = (average: number) => ({
  unit: "ppm",
  rule: "linear" as const,
  average,
  spread: 0.1,
  covered: 1,
  error: { sd: 0.01, low: null, high: null },
});
const column = (name: string, atom: number | null) => ({
  ...{ name, kind: "property" as const, unit: "ppm", rule: "linear", values: [1, 2], sha256: "0".repeat(64) },
  ...{ quantity: atom === null ? null : "shift", atom },
});
const content = {
  kept: [{ frame: 1 }, { frame: 2 }],
  ensemble: { elements: [6, 1, 1, 1] },
  columns: [column("s1", 1), column("s2", 2), column("dipole", null), column("s3", 3), column("other", null)],
  averages: [
    { property: "s1", ...figures(70) },
    { property: "s2", ...figures(3.2) },
    { property: "dipole", ...figures(3.2) },
    { property: "s3", ...figures(3.2) },
    { property: "other", ...figures(3.2) },
  ],
} as unknown as Parameters<typeof signalRows>[0];

it("lists equivalent atoms in one row, and never what is no per-atom quantity", () => {
  const rows = signalRows(content)!;
  expect(rows.map(({ row, place }) => [row.property, place])).toEqual([
    ["shift of C1", 0],
    ["shift of H2, H3", 1],
    ["dipole", 2],
    ["other", 4],
  ]);
  expect(signalRows({ ...content, averages: null })).toBeNull();
});

it("lists a column that counts the frames up like any other, and names it", () => {
  const kept = [{ frame: 1 }, { frame: 2 }, { frame: 3 }];
  const rank = { ...column("rank", null), unit: null, values: [1, 2, 3] };
  const steps = { ...column("steps", null), unit: null, values: [1, 2, 4] };
  const counted = {
    ...content,
    kept,
    columns: [rank, steps],
    averages: [
      { property: "rank", ...figures(1.4), unit: null },
      { property: "steps", ...figures(1.6), unit: null },
    ],
  } as unknown as Parameters<typeof signalRows>[0];
  expect(signalRows(counted)?.map(({ row }) => row.property)).toEqual(["rank", "steps"]);
  expect(countingProperties(counted)).toEqual(["rank"]);
});
