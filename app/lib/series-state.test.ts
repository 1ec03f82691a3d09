import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  chooseRows,
  levelLegend,
  levelNames,
  nextSort,
  ROW_STATES,
  readSeriesState,
  rowState,
  type SeriesState,
  SORT_KEYS,
  seriesFinding,
  writeSeriesState,
} from "./series-state.ts";
import type { EnsembleRow } from "./views.ts";

const plain = readSeriesState(new URLSearchParams());

let made = 0;
function row(over: Partial<EnsembleRow> = {}): EnsembleRow {
  made++;
  return {
    id: `id${made}`,
    name: `Ensemble ${made}`,
    formula: "C4H10",
    series: { id: "s1", name: "Tails" },
    frames: 100,
    held: 0,
    waiting: 0,
    openQuestions: 0,
    levels: [{ name: "MMFF94", ordinal: 1 }],
    fileNames: ["run.xyz"],
    sift: done(10, [0.6, 0.4]),
    changedAt: "2026-12-01T10:00:00Z",
    ...over,
  };
}
function done(distinct: number, shares: number[]): EnsembleRow["sift"] {
  const lowest = shares[0] ?? null;
  return {
    id: "x",
    status: "done",
    progress: 1,
    distinct,
    shares,
    lowest,
    effectiveCount: shares.length,
    changed: [],
  };
}
const names = (rows: EnsembleRow[]) => rows.map((r) => r.name);

describe("address", () => {
  const anyState: fc.Arbitrary<SeriesState> = fc.record({
    q: fc.string({ maxLength: 40 }).map((text) => text.trim()),
    series: fc.option(fc.string({ minLength: 1, maxLength: 16 })),
    level: fc.option(fc.string({ minLength: 1, maxLength: 30 })),
    state: fc.option(fc.constantFrom(...ROW_STATES)),
    held: fc.option(fc.constantFrom("some" as const, "none" as const)),
    sort: fc.record({ by: fc.constantFrom(...SORT_KEYS), down: fc.boolean() }),
    page: fc.integer({ min: 1, max: 50 }),
  });

  it("brings back every state", () => {
    fc.assert(
      fc.property(anyState, (state) => {
        expect(readSeriesState(new URLSearchParams(writeSeriesState(state).toString()))).toEqual(state);
      }),
      { seed: 2026, numRuns: 300 },
    );
  });

  it("is plain when all is as usual, and shrugs at nonsense", () => {
    expect(writeSeriesState(plain).toString()).toBe("");
    const odd = new URLSearchParams("sort=-colour&state=x&held=2&page=-3&level=");
    expect(readSeriesState(odd)).toEqual(plain);
  });
});

describe("rows", () => {
  it("are found by words in name, formula, level and file, in any case", () => {
    const rows = [
      row({ name: "N-Butyl-tosylamide", formula: "C11H17NO2S" }),
      row({ name: "Hexane", levels: [{ name: "B3LYP/6-31G(d)", ordinal: 2 }] }),
      row({ name: "Acid", fileNames: ["night-shift.xyz.gz"] }),
    ];
    const search = (q: string) => names(chooseRows(rows, { ...plain, q }));
    expect(search("BUTYL c11h17")).toEqual(["N-Butyl-tosylamide"]);
    expect(search("b3lyp")).toEqual(["Hexane"]);
    expect(search("night-shift")).toEqual(["Acid"]);
    expect(search("butyl hexane")).toEqual([]);
  });

  it("are left out by level, state, held and series", () => {
    const rows = [
      row({ name: "asks", openQuestions: 1, held: 3, sift: null }),
      row({ name: "waits", openQuestions: 1, held: 90, waiting: 90, sift: null, levels: [] }),
      row({ name: "ready" }),
      row({ name: "other", series: { id: "s2", name: "Rings" }, levels: [] }),
    ];
    const only = (over: Partial<SeriesState>) => names(chooseRows(rows, { ...plain, ...over }));
    expect(only({ state: "asks" })).toEqual(["asks", "waits"]);
    expect(only({ held: "some" })).toEqual(["asks"]);
    expect(only({ held: "none", level: "MMFF94" })).toEqual(["ready"]);
    expect(only({ series: "s2" })).toEqual(["other"]);
  });

  it("sort either way with absent values last, and numbers in names as numbers", () => {
    const rows = [
      row({ name: "run 10", sift: done(3, [1]) }),
      row({ name: "run 9", sift: null }),
      row({ name: "run 2", sift: done(31, [0.3, 0.3, 0.4]) }),
    ];
    const sorted = (by: SeriesState["sort"]["by"], down: boolean) =>
      names(chooseRows(rows, { ...plain, sort: { by, down } }));
    expect(sorted("distinct", true)).toEqual(["run 2", "run 10", "run 9"]);
    expect(sorted("distinct", false)).toEqual(["run 10", "run 2", "run 9"]);
    expect(sorted("name", false)).toEqual(["run 2", "run 9", "run 10"]);
  });

  it("keep their order whatever order they come in", () => {
    const rows = Array.from({ length: 12 }, (_, i) =>
      row({ frames: i % 3, sift: i % 4 === 0 ? null : done(i % 2, [1]) }),
    );
    fc.assert(
      fc.property(
        fc.shuffledSubarray(rows, { minLength: 12 }),
        fc.constantFrom(...SORT_KEYS),
        fc.boolean(),
        (mixed, by, down) => {
          const state = { ...plain, sort: { by, down } };
          expect(names(chooseRows(mixed, state))).toEqual(names(chooseRows(rows, state)));
        },
      ),
      { seed: 99, numRuns: 100 },
    );
  });

  it("turn their direction on a second click", () => {
    const once = nextSort(plain.sort, "frames");
    expect(once).toEqual({ by: "frames", down: true });
    expect(nextSort(once, "frames")).toEqual({ by: "frames", down: false });
    expect(nextSort(once, "name")).toEqual({ by: "name", down: false });
  });

  it("have one state each, the open question before all", () => {
    expect(rowState(row({ openQuestions: 2 }))).toBe("asks");
    expect(rowState(row({ sift: null }))).toBe("open");
    const running = { ...done(0, []), status: "queued" } as EnsembleRow["sift"];
    expect(rowState(row({ sift: running }))).toBe("running");
  });
});

describe("level legend", () => {
  const levels = (...names: string[]) => names.map((name, i) => ({ name, ordinal: i + 1 }));

  it("names the markers where each means one level, and nothing where they differ", () => {
    const alike = [row({ levels: levels("MMFF94", "UFF") }), row({ levels: levels("MMFF94") })];
    expect(levelLegend(alike)).toEqual(levels("MMFF94", "UFF"));
    expect(levelLegend([...alike, row({ levels: levels("UFF") })])).toEqual([]);
    expect(levelNames([...alike, row({ levels: levels("AM1", "MMFF94") })])).toEqual([
      "AM1",
      "MMFF94",
      "UFF",
    ]);
  });
});

describe("seriesFinding", () => {
  const running = { ...done(0, []), status: "running" } as EnsembleRow["sift"];

  it("counts in words and says what waits", () => {
    const rows = [
      ...Array.from({ length: 7 }, () => row({ frames: 315 })),
      row({ frames: 505, sift: running }),
      row({ frames: 1200, openQuestions: 1 }),
    ];
    expect(seriesFinding(rows)).toBe(
      "Nine ensembles, 3,910 frames. Two wait for something: one for an answer, one for its sift.",
    );
    expect(seriesFinding([row({ frames: 1, sift: running })])).toBe(
      "One ensemble, 1 frame. One waits for its sift.",
    );
    expect(seriesFinding([row()])).toBe("One ensemble, 100 frames.");
    expect(seriesFinding([])).toBe("No ensembles, 0 frames.");
  });
});
