import { describe, expect, it } from "vitest";
import type { SiftResult } from "../recipe/result.ts";
import { weigh } from "../thermo/boltzmann.ts";
import { findingsText, type TrustInput, trustFindings, trustHeadline } from "./findings.ts";
import { populationError } from "./population-error.ts";
import { samplingCoverage } from "./sampling-coverage.ts";
import { compareSearches, foundBySearch, halvesOf, handsFound } from "./searches.ts";

const ENERGIES = [0, 0.34, 1, 1.6];

function input(change: Partial<TrustInput> = {}, sigmaKcal = 0.5): TrustInput {
  const found = [5, 70, 2, 1];
  return {
    names: ["c1", "c2", "c3", "c4"],
    energies: ENERGIES,
    populations: weigh(ENERGIES, [1, 1, 1, 1], 298.15).populations,
    found,
    temperatureK: 298.15,
    level: { name: "MMFF94", energyKind: "electronic", temperatureK: null },
    error: {
      sigmaKcal,
      drawn: populationError({
        energies: ENERGIES,
        temperatureK: 298.15,
        error: { sigma: sigmaKcal },
        seed: 1,
      }),
    },
    others: [],
    coverage: samplingCoverage(found),
    searches: null,
    hands: [],
    window: null,
    cut: null,
    held: [],
    nearMirror: [],
    chirality: "achiral",
    tolerance: null,
    ...change,
  };
}

const titles = (change: Partial<TrustInput> = {}, sigma?: number) =>
  trustFindings(input(change, sigma)).map(({ kind, title }) => `${kind}: ${title}`);

describe("findings", () => {
  it("say that the top two cannot be told apart while the error is larger than their distance", () => {
    const [first] = trustFindings(input());
    expect(first).toMatchObject({ kind: "settle", title: "c1 and c2 cannot be told apart." });
    // Two states 0.34 apart with 0.5 on each: Phi(0.34/0.707) = 0.685 before the others take their part.
    expect(first!.reason).toContain("0.34\u00a0kcal/mol apart; two errors of ± 0.50 make ± 0.71");
    expect(titles({}, 0.05)[0]).not.toContain("told apart");
    expect(titles({}, 0.05)).toContainEqual(expect.stringContaining("nothing: c1 is the lowest, whatever"));
  });

  it("name a level that puts another shape lowest, and offer to weigh by it", () => {
    const energies = [0.6, 0.2, 0, 2];
    const other = {
      id: "b",
      name: "B3LYP",
      energies,
      populations: weigh(energies, [1, 1, 1, 1], 298.15).populations,
    };
    const found = trustFindings(input({ others: [other] })).find(({ title }) => title.startsWith("B3LYP"));
    expect(found).toMatchObject({
      kind: "settle",
      title: "B3LYP puts another shape lowest.",
      act: { type: "weigh", level: "b" },
    });
    expect(found!.reason).toContain("c3 instead of c1, by 0.60\u00a0kcal/mol");
    const same = { ...other, energies: ENERGIES, populations: input().populations };
    expect(titles({ others: [same] })).toContain("nothing: B3LYP puts the same shape lowest.");
  });

  it("never show 100 % for a search whose repeats were removed before", () => {
    const found = [1, 1, 1, 1];
    const told = trustFindings(input({ found, coverage: samplingCoverage(found) }));
    expect(told.map(({ title }) => title)).toContain("How complete the search is cannot be told.");
    expect(JSON.stringify(told)).not.toContain("100");
  });

  it("count what is probably missing, and say when nothing points to it", () => {
    expect(titles({ coverage: samplingCoverage([5, 4, 3, 2, 2, 1, 1, 1, 1]) })).toContain(
      "settle: Four or so shapes are probably missing.",
    );
    expect(titles({ coverage: samplingCoverage([4, 3, 2, 2]) })).toContain(
      "nothing: Nothing points to a missing shape.",
    );
  });

  it("tell what hangs on the tolerance, on a nearly flat centre and on energies of another temperature", () => {
    expect(titles({ tolerance: { at: 0.2, now: 31, half: [0.1, 55], double: [0.4, 31] } })).toContain(
      "know: The number of shapes hangs on the RMSD tolerance.",
    );
    expect(titles({ tolerance: { at: 99, now: 1, half: [49.5, 1], double: [198, 1] } })).toContain(
      "settle: The RMSD tolerance is so wide that different shapes merge.",
    );
    expect(titles({ tolerance: { at: 0.2, now: 31, half: [0.1, 31], double: [0.4, 30] } })).toContain(
      "nothing: The count does not hang on the tolerance.",
    );
    expect(titles({ chirality: "unsure" })).toContain(
      "settle: It is not sure whether the molecule is chiral.",
    );
    expect(titles({ level: { name: "G", energyKind: "free", temperatureK: 310 } })).toContain(
      "settle: The energies of G belong to 310 K.",
    );
    expect(titles({ nearMirror: [{ name: "c2", rmsd: 0.21, population: 0.3 }] })).toContain(
      "settle: The factor 2 of c2 hangs on the RMSD tolerance.",
    );
  });

  it("come in the order of their kinds and as text, with no score and no percentage of trust", () => {
    const found = trustFindings(input({ held: [{ frame: 233, reason: "other-bonds" }] }));
    const kinds = found.map(({ kind }) => kind);
    expect(kinds).toEqual(
      [...kinds].sort(
        (a, b) => ["settle", "know", "nothing"].indexOf(a) - ["settle", "know", "nothing"].indexOf(b),
      ),
    );
    const text = findingsText(found);
    expect(text.startsWith("Yours to settle:\n- c1 and c2 cannot be told apart.")).toBe(true);
    expect(text).toContain("Frame 233 is held and takes no part.");
    expect(text).not.toMatch(/score|trust of/i);
  });

  it("open with what the top shapes hold and how many findings there are", () => {
    const found = trustFindings(input());
    const { text, second } = trustHeadline(input(), found, { count: 2, low: 0.43, high: 0.86 });
    expect(text).toContain(
      "between 43\u00a0% and 86\u00a0% of the ensemble; which shape is the lowest is not settled.",
    );
    const settle = found.filter(({ kind }) => kind === "settle").length;
    expect(second.toLowerCase()).toContain(settle === 1 ? "one finding is yours" : "findings are yours");
  });
});

describe("searches", () => {
  const kept = (frame: number, degeneracy = 1) => ({
    ...{ frame, degeneracy, relativeEnergy: 0, symmetryNumber: 1, copies: 1, mirrorRmsd: 1, found: 1 },
  });
  const dropped = (frame: number, repeats: number, mirror?: boolean) => ({
    ...{ frame, repeats, rmsd: 0.01, energyDifference: 0 },
    ...(mirror === undefined ? {} : { mirror }),
  });
  const result: SiftResult = {
    kept: [kept(1, 2), kept(3), kept(7)],
    dropped: [dropped(2, 1, true), dropped(4, 3), dropped(5, 1, false), dropped(6, 3)],
    held: [],
    outsideWindow: [],
    withoutEnergy: [],
    pairsExamined: 0,
    seconds: 0,
  };

  it("are credited with the conformers that their frames show", () => {
    const found = foundBySearch(result, [
      { name: "night", ranges: [[1, 4]] },
      { name: "day", ranges: [[5, 7]] },
    ]);
    expect(found.map(({ frames, places }) => [frames, places])).toEqual([
      [4, [0, 1]],
      [3, [0, 1, 2]],
    ]);
    expect(compareSearches(found)).toEqual({ first: 2, second: 3, both: 2, estimate: (3 * 4) / 3 - 1 });
    expect(compareSearches(found.slice(0, 1))).toBeNull();
  });

  it("of one file are its two halves", () => {
    expect(halvesOf(7).map(({ ranges }) => ranges)).toEqual([[[1, 3]], [[4, 7]]]);
  });

  it("count the hands of mirror pairs", () => {
    expect(handsFound(result)).toEqual([{ place: 0, own: 2, other: 1 }]);
  });
});
