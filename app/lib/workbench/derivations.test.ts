import { readFileSync } from "node:fs";
import { describe, expect, test } from "vitest";
import { pentaneView as ensemble } from "../../../tests/factories/ensemble-view.ts";
import type { IntakeMessage } from "../intake/report.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import type { KeptConformer, SiftResult } from "../recipe/result.ts";
import { distinctPopulations } from "../thermo/populations.ts";
import type { EnsembleView, FrameView, SiftView } from "../views.ts";
import { conformerRows, frameRoles, outsideWindow } from "./conformers.ts";
import { cumulativePopulation, withinWindow } from "./cumulative.ts";
import {
  distinctFinding,
  farthestMerged,
  frameSentence,
  intakeFinding,
  joinWords,
  nearMirror,
  populationsFinding,
  shareFigure,
  shareWords,
  spreadCaution,
  windowFinding,
} from "./findings.ts";
import { frameStrip } from "./frame-strip.ts";
import { framesWords, groupFrames, reasonWords } from "./intake-lists.ts";
import { energyLadder, mergeLabels } from "./ladder.ts";
import { defaultsOf, recipeLine, requestOf, settingsApart } from "./recipe-words.ts";
import { clickSelection } from "./selection.ts";
import { sortRows } from "./sort-rows.ts";
import { stations } from "./stations.ts";
import { roundTicks, tickDigits } from "./ticks.ts";
import { toCsv, toTsv } from "./tsv.ts";
import { laidOverCaption, viewPlan } from "./view-plan.ts";

const NBSP = "\u00a0";

// The 31 distinct conformers of reference/ensembles/tosylamide.expected.json (MMFF94, mirror images merged, heavy+polarH,
// 0.12 kcal/mol, 0.20 Å), found by a program that shares no code with this one.
const fixture = JSON.parse(
  readFileSync(new URL("../../../fixtures/workbench/tosylamide-31.json", import.meta.url), "utf8"),
) as { kept: number[][] };
const tosylamide: KeptConformer[] = fixture.kept.map((row) => ({
  frame: row[0]!,
  relativeEnergy: row[1]!,
  degeneracy: row[2]!,
  symmetryNumber: row[3]!,
  copies: row[4]!,
  mirrorRmsd: row[5]!,
  found: row[6]!,
}));
const rows = conformerRows(tosylamide, distinctPopulations(tosylamide, "electronic", 298.15), 3);

// Pentane TT, TG, GG, GX with copies 1, 4, 2, 4: energies of Gruzman et al., J. Phys. Chem. A 2009, 113, 11974;
// populations 35.103, 49.813, 13.866, 1.217 % from the check values.
const pentane: KeptConformer[] = [
  [1, 0, 1, 2, 1],
  [2, 0.614, 2, 1, 4],
  [3, 0.961, 2, 2, 2],
  [4, 2.813, 2, 1, 4],
].map(([frame, energy, degeneracy, symmetryNumber, copies]) => ({
  frame: frame!,
  relativeEnergy: energy!,
  degeneracy: degeneracy!,
  symmetryNumber: symmetryNumber!,
  copies: copies!,
  mirrorRmsd: 0.3,
  found: 3,
}));
const pentaneRows = conformerRows(pentane, distinctPopulations(pentane, "electronic", 298.15), null);

const recipe: SiftRecipe = {
  version: 1,
  level: "aaaaaaaaaaaaaaaa",
  levelName: "MMFF94",
  window: null,
  energyTolerance: 0.15,
  rmsdTolerance: 0.2,
  atoms: "heavy+polarH",
  symmetry: true,
  mirror: "merge",
  chirality: "achiral",
  chiralityOverridden: false,
};
const result: SiftResult = {
  kept: pentane,
  dropped: [
    { frame: 5, repeats: 2, rmsd: 0.0004, energyDifference: 0.01, mirror: true },
    { frame: 6, repeats: 1, rmsd: 0.11, energyDifference: 0.02 },
    { frame: 8, repeats: 3, rmsd: 0.05, energyDifference: 0, upperBound: true },
  ],
  held: [{ frame: 7, reason: "other-species" }],
  outsideWindow: [9],
  withoutEnergy: [10, 11],
  pairsExamined: 866,
  seconds: 0.104,
};

describe("cumulative population", () => {
  test("tosylamide: 50, 90, 95 and 99 % lie within 0.65, 1.65, 1.86 and 2.45 kcal/mol with 3, 13, 16, 22 conformers", () => {
    const readings = cumulativePopulation(rows)!.readings;
    expect(readings.map((r) => [r.asked, Number(r.energy.toFixed(2)), r.count])).toEqual([
      [0.5, 0.65, 3],
      [0.9, 1.65, 13],
      [0.95, 1.86, 16],
      [0.99, 2.45, 22],
    ]);
  });

  test("pentane: 84.916 % within TG, 98.782 % within GG", () => {
    const { steps } = cumulativePopulation(pentaneRows)!;
    expect(steps.map((s) => Number((100 * s.share).toFixed(2)))).toEqual([35.1, 84.92, 98.78, 100]);
    expect(withinWindow({ steps, readings: [] }, 0.614)).toEqual({ share: steps[1]!.share, count: 2 });
    expect(withinWindow({ steps, readings: [] }, null).count).toBe(4);
  });

  test("conformers of one energy come together, and no energies give none", () => {
    const twins = conformerRows(
      [pentane[0]!, { ...pentane[1]!, relativeEnergy: 0 }],
      distinctPopulations([pentane[0]!, { ...pentane[1]!, relativeEnergy: 0 }], "electronic", 298.15),
      null,
    );
    expect(cumulativePopulation(twins)!.steps).toEqual([{ energy: 0, share: 1, count: 2 }]);
    const bare = conformerRows([{ ...pentane[0]!, relativeEnergy: null }], null, 3);
    expect(cumulativePopulation(bare)).toBeNull();
    expect(energyLadder(bare, 298.15, 3)).toBeNull();
  });
});

describe("window", () => {
  test("tosylamide: 8 of 31 conformers above 3.00 kcal/mol hold 0.5 %", () => {
    const outside = outsideWindow(rows);
    expect(outside.count).toBe(8);
    expect(outside.share).toBeCloseTo(0.005113609134187301, 9);
    expect(windowFinding(rows, outside, 3, 298.15, recipe, 0)).toEqual([
      `Eight conformers above the window of 3.00${NBSP}kcal/mol hold 0.5${NBSP}%.`,
    ]);
  });

  test("a sift with a window says what a missing copy could weigh: 0.6 % at 3 kcal/mol and 298.15 K", () => {
    // exp(-3/RT) = 0.00633: methods page, section 7.
    const [line] = windowFinding(rows, { count: 0, share: 0 }, null, 298.15, { ...recipe, window: 3 }, 12);
    expect(line).toContain("12 frames");
    expect(line).toContain(`0.6${NBSP}% of the lowest conformer`);
  });
});

describe("energy ladder", () => {
  const ladder = energyLadder(rows, 298.15, 3)!;

  test("a rung a conformer below the top, and the rest counted", () => {
    // c24 at 3.032803 kcal/mol is the one that completes 99.5 %.
    expect(ladder.top).toBeCloseTo(1.12 * 3.032803, 6);
    expect(ladder.rungs.length + ladder.above.count + ladder.covered).toBe(31);
    expect(ladder.rungs[0]!.name).toBe("c1");
    expect(ladder.rungs[0]!.population).toBeCloseTo(0.285, 3);
  });

  test("every rung of the commonest weight ends on the curve", () => {
    // All 31 have degeneracy 2 and symmetry number 1, so all lie on one curve.
    const rt = 0.592484; // R T at 298.15 K, kcal/mol, CODATA 2022
    for (const rung of ladder.rungs)
      expect(rung.population / ladder.rungs[0]!.population).toBeCloseTo(Math.exp(-rung.energy / rt), 4);
    expect(ladder.curve.weight).toBe(1);
    expect(ladder.curve.points[0]!.population).toBeCloseTo(ladder.rungs[0]!.population, 12);
  });

  test("of many rungs at one height the most populated is drawn and the others counted", () => {
    const many = Array.from({ length: 5000 }, (_, k) => ({
      ...pentane[0]!,
      frame: k + 1,
      relativeEnergy: k / 2000,
    }));
    const crowded = energyLadder(
      conformerRows(many, distinctPopulations(many, "electronic", 298.15), 3),
      298.15,
      3,
    )!;
    expect(crowded.rungs.length).toBeLessThanOrEqual(600);
    expect(crowded.rungs.length + crowded.covered + crowded.above.count).toBe(5000);
    expect(crowded.rungs[0]!.name).toBe("c1");
  });

  test("a window far above every conformer does not squeeze them", () => {
    expect(energyLadder(rows, 298.15, 100)!.top).toBeLessThan(8);
  });

  test("labels closer than 13 pixels are merged", () => {
    const placed = mergeLabels([
      { name: "c1", x: 300, y: 200 },
      { name: "c2", x: 180, y: 180 },
      { name: "c3", x: 120, y: 160 },
      { name: "c4", x: 110, y: 156 },
    ]);
    expect(placed.map((label) => label.names.join(", "))).toEqual(["c1", "c2", "c3, c4"]);
    expect(placed[2]).toMatchObject({ x: 120, y: 158 });
  });
});

describe("findings in words", () => {
  test("tosylamide: five shapes carry 69 %, c1 alone 29 %", () => {
    expect(populationsFinding(rows, 298.15).text).toBe(
      `Five shapes carry 69${NBSP}% of the ensemble at 298.15${NBSP}K, c1 alone 29${NBSP}%.`,
    );
  });

  test("pentane: the most populated is not the lowest", () => {
    expect(populationsFinding(pentaneRows, 298.15).text).toBe(
      `Three shapes carry 98.8${NBSP}% of the ensemble at 298.15${NBSP}K, c2 alone 49.8${NBSP}%.`,
    );
  });

  test("one shape, one that dominates, and none that does", () => {
    const at = (energies: number[]) => {
      const kept = energies.map((e, k) => ({ ...pentane[0]!, frame: k + 1, relativeEnergy: e }));
      return populationsFinding(
        conformerRows(kept, distinctPopulations(kept, "electronic", 298.15), 3),
        298.15,
      );
    };
    expect(at([0]).text).toBe(`One shape is all there is: c1 holds the whole ensemble at 298.15${NBSP}K.`);
    // exp(-3/RT) = 0.00633: 0.6 % beside 99.4 %
    expect(at([0, 3])).toEqual({
      text: `c1 alone carries 99${NBSP}% of the ensemble at 298.15${NBSP}K.`,
      second: `Next comes c2 with 0.6${NBSP}%.`,
    });
    // Two of one energy: half each.
    expect(at([0, 0]).text).toBe(
      `Two shapes share the whole ensemble at 298.15${NBSP}K: c1 50${NBSP}% and c2 50${NBSP}%.`,
    );
    // A hundred alike: 1 % each, fifty of them make half.
    expect(at(Array.from({ length: 100 }, () => 0)).text).toBe(
      `It takes 50 shapes to hold half of the ensemble at 298.15${NBSP}K: the most populated, c1, has 1${NBSP}%.`,
    );
  });

  test("without energies nothing is weighed, and the page says why", () => {
    const bare = conformerRows([{ ...pentane[0]!, relativeEnergy: null }], null, 3);
    expect(populationsFinding(bare, 298.15).text).toMatch(/carry no energies/);
    expect(populationsFinding([], 298.15).text).toMatch(/no conformer/);
  });

  test("a share is never rounded to all or nothing", () => {
    expect([1, 0.9996, 0.69295, 0.0095, 0.0051, 0.00001, 0].map(shareWords)).toEqual(
      ["100", "more than 99", "69", "1", "0.5", "below 0.1", "0"].map((text) => `${text}${NBSP}%`),
    );
    expect([1, 0.9997, 0.69295, 0.0305, 0.00063, 0.00001, 0].map(shareFigure)).toEqual(
      ["100.0", "more than 99.9", "69.3", "3.0", "0.1", "below 0.1", "0.0"].map((text) => `${text}${NBSP}%`),
    );
  });

  test("the distinct set", () => {
    expect(distinctFinding(result)).toEqual({
      text: "7 accepted frames repeat 4 shapes.",
      second:
        "3 frames were left out as repeats; each names whom it repeats. 866 pairs had to be compared, " +
        `in 0.1${NBSP}s. 1 frame lies above the window, 2 frames have no energy at this level and 1 frame is held.`,
    });
    expect(distinctFinding({ ...result, dropped: [] }).text).toBe(
      "All 4 frames differ from each other: none repeats another.",
    );
    expect(farthestMerged(result)).toEqual({ frame: 6, repeats: 1, rmsd: 0.11 });
  });

  test("a mirror image near the tolerance is named, where images are merged", () => {
    expect(nearMirror(result, recipe).map((c) => c.name)).toEqual(["c1", "c2", "c3", "c4"]);
    expect(nearMirror(result, { ...recipe, rmsdTolerance: 0.05 })).toEqual([]);
    expect(nearMirror(result, { ...recipe, mirror: "keep" })).toEqual([]);
  });

  const level = {
    ...{ id: "eeeeeeeeeeeeeeee", name: "A", unit: "hartree", count: 397, missing: 0, ordinal: 1 },
    ...{ energyKind: "electronic" as const, temperature: null },
  };

  test("intake", () => {
    const weighed = { ...ensemble, levels: [level] };
    const quiet = { waiting: 0, questions: [], messages: [], strip: "" };
    expect(intakeFinding(weighed, quiet).text).toBe(
      "400 frames read: 397 are accepted, 5 of them with a remark, and 3 are held.",
    );
    const open = { ...weighed, accepted: 0, remarked: 0, held: 400, openQuestions: 2 };
    expect(intakeFinding(open, { ...quiet, waiting: 397 }).text).toBe(
      "400 frames read: 397 can be accepted and 3 are held for other reasons. Two questions come first; nothing is computed before they are answered.",
    );
    // No frame waits for the question which configuration it is.
    const chosen = { ...weighed, accepted: 397, held: 3, openQuestions: 1 };
    expect(intakeFinding(chosen, quiet).text).toBe(
      "400 frames read: 397 are accepted already and 3 are held. One question is open; what is accepted is used meanwhile.",
    );
    // What is held while it is open which configuration is the ensemble is held for that, not for other reasons.
    const choice = { id: "configuration", code: "S23", text: "Which configuration?", options: [] };
    const unit2 = { id: "energy-unit", code: "E01", text: "Which unit?", options: [] };
    expect(intakeFinding(open, { ...quiet, waiting: 397, questions: [unit2, choice] }).text).toContain(
      "397 can be accepted and 3 are held. Two questions",
    );
    const whole = { ...weighed, accepted: 400, remarked: 0, held: 0 };
    expect(intakeFinding(whole, quiet).text).toBe("400 frames read: all are accepted.");
    const unit = { id: "u", code: "energy-from", text: "Which number is the energy?", options: [] };
    expect(intakeFinding(open, { ...quiet, waiting: 400, questions: [unit] }).text).toBe(
      "400 frames read: 400 can be accepted. Two questions come first, and an answer may bring another; nothing is computed before they are answered.",
    );
  });

  test("intake says first what is odd of the energies, or that there are none", () => {
    const quiet = { waiting: 0, questions: [], messages: [], strip: "" };
    const whole = { ...ensemble, levels: [level], accepted: 400, remarked: 0, held: 0 };
    const none = intakeFinding({ ...whole, levels: [] }, quiet);
    expect(none.text).toBe(
      "400 frames read: all are accepted. None has an energy, so there are no populations.",
    );
    expect(none.second).toMatch(/^Give the energies as a table/);
    const wide = {
      ...({ code: "E12", severity: "remark", file: "a.xyz" } as const),
      message: "The energies span 395 kcal/mol, more than conformers of one molecule do.",
      hint: "Is the unit right, and are all frames the same molecule?",
    };
    const all = "400 frames read: all are accepted.";
    const say = (messages: IntakeMessage[], strip = "aaaaa") =>
      intakeFinding(whole, { ...quiet, messages, strip }).text;
    expect(say([wide])).toBe(`${all} ${wide.message} ${wide.hint}`);
    // A batch that lies apart, and single frames that do, of the first upload and of later ones alike.
    const batch = {
      ...wide,
      file: "b.xyz",
      message: "The energies of this batch (frames 4 to 5) lie apart.",
    };
    expect(say([wide, batch])).toBe(`${all} ${wide.message} ${wide.hint} ${batch.message} ${wide.hint}`);
    const lone = {
      ...wide,
      frame: 3,
      message: "The energy lies 501 kcal/mol from the middle of the others.",
    };
    expect(say([lone])).toBe(
      `${all} In frame 3 the energy lies 501 kcal/mol from the middle of the others. ${wide.hint}`,
    );
    expect(say([lone], "aahaa")).toBe(all);
    const several = [lone, { ...lone, frame: 4 }, { ...lone, frame: 1 }];
    expect(say(several)).toMatch(
      / The energies of frames 1, 3, 4 lie more than 100 kcal\/mol from those of the rest\. /,
    );
    const { hint: _none, ...rest } = { ...wide, message: "40 more of this kind, not listed." };
    expect(say([...several, rest])).toContain("The energies of frames 1, 3, 4 and of others lie");
    const apart = (kcal: number) =>
      rows.map((row, k) => ({ ...row, relativeEnergy: (k * kcal) / (rows.length - 1) }));
    expect(spreadCaution(apart(395), level)).toMatch(
      /^The energies of “A” span 395 kcal\/mol, .* in hartree\.$/,
    );
    expect(spreadCaution(apart(4), level)).toBeNull();
    expect(spreadCaution(apart(395), null)).toBeNull();
  });

  test("what became of a frame", () => {
    const roles = frameRoles(result);
    const say = (frame: number) => frameSentence(frame, roles.get(frame));
    expect(say(2)).toBe("Frame 2 is c2 itself.");
    expect(say(5)).toBe(
      `Frame 5 repeats c2 (frame 2) as its mirror image: RMSD below 0.001${NBSP}Å, 0.01${NBSP}kcal/mol above it.`,
    );
    expect(say(8)).toContain(`RMSD at most 0.050${NBSP}Å`);
    expect(say(7)).toMatch(/held/);
    expect(say(9)).toMatch(/above the window/);
    expect(say(10)).toMatch(/no energy/);
    expect(say(99)).toMatch(/no frame 99/);
  });

  test("lists of words", () => {
    expect([[], ["a"], ["a", "b"], ["a", "b", "c"]].map(joinWords)).toEqual([
      "",
      "a",
      "a and b",
      "a, b and c",
    ]);
  });
});

describe("recipe in words", () => {
  test("the foot of the page", () => {
    expect(recipeLine(recipe, 298.15).replaceAll(NBSP, " ")).toBe(
      "MMFF94 energies, 298.15 K, energy tolerance 0.15 kcal/mol, RMSD tolerance 0.200 Å, heavy atoms and polar H, symmetry on, mirror images merged",
    );
    expect(recipeLine({ ...recipe, energyTolerance: null, window: 5 }, null)).toContain(
      "no energy tolerance",
    );
  });

  test("asking for a recipe again changes nothing", () => {
    expect(requestOf(recipe)).toMatchObject({ mirror: "auto", chirality: "auto", energyTolerance: 0.15 });
    expect(requestOf({ ...recipe, mirror: "keep" }).mirror).toBe("keep");
    expect(
      requestOf({ ...recipe, chirality: "chiral", mirror: "keep", chiralityOverridden: true }),
    ).toMatchObject({
      mirror: "auto",
      chirality: "chiral",
    });
  });
});

describe("table", () => {
  test("sorting keeps the set's order among equals, and unknown values last both ways", () => {
    const rmsd = [0, undefined, 0.5, 0.5];
    const names = (descending: boolean) =>
      sortRows(pentaneRows, { column: "rmsd", descending }, { rmsd, measure: null }).map((row) => row.name);
    expect(names(false)).toEqual(["c1", "c3", "c4", "c2"]);
    expect(names(true)).toEqual(["c3", "c4", "c1", "c2"]);
    expect(
      sortRows(pentaneRows, { column: "nonsense", descending: true }, { rmsd: null, measure: null }),
    ).toEqual(pentaneRows);
    const most = sortRows(
      pentaneRows,
      { column: "population", descending: true },
      { rmsd: null, measure: null },
    );
    expect(most.map((row) => row.name)).toEqual(["c2", "c1", "c3", "c4"]);
  });

  test("click selects, a further click joins or leaves, shift extends from the first", () => {
    const order = [4, 2, 9, 7];
    expect(clickSelection([], 9, order, "only")).toEqual([9]);
    expect(clickSelection([9], 9, order, "only")).toEqual([]);
    expect(clickSelection([9], 4, order, "add")).toEqual([9, 4]);
    expect(clickSelection([9, 4], 9, order, "add")).toEqual([4]);
    expect(clickSelection([2], 7, order, "extend")).toEqual([2, 9, 7]);
    expect(clickSelection([9, 7], 4, order, "extend")).toEqual([9, 2, 4]);
    expect(clickSelection([], 4, order, "extend")).toEqual([4]);
  });

  test("copied text has raw numbers and no formula", () => {
    expect(
      toTsv(
        ["name", "x"],
        [
          ["=1+1", 0.1 + 0.2],
          ["a\tb", null],
        ],
      ),
    ).toBe("name\tx\n'=1+1\t0.30000000000000004\na b\t\n");
    expect(toCsv(["a, b"], [[-1.5], ["-x"], ['say "x"']])).toBe('"a, b"\r\n-1.5\r\n\'-x\r\n"say ""x"""\r\n');
  });
});

describe("frame strip", () => {
  test("one tick a frame up to a thousand", () => {
    const strip = frameStrip("arhw");
    expect(strip.perTick).toBe(1);
    expect(strip.ticks.map((tick) => tick.state)).toEqual(["accepted", "remarked", "held", "waiting"]);
    expect(frameStrip("a".repeat(1000)).ticks).toHaveLength(1000);
  });

  test("above, a bin shows its most serious frame and counts them", () => {
    const strip = frameStrip(`${"a".repeat(2500)}hr${"a".repeat(2499)}`);
    expect(strip.perTick).toBe(10);
    expect(strip.ticks).toHaveLength(501);
    expect(strip.ticks[250]).toEqual({
      first: 2501,
      last: 2510,
      state: "held",
      remarked: 1,
      waiting: 0,
      held: 1,
    });
    expect(strip.ticks.at(-1)).toMatchObject({ first: 5001, last: 5001 });
    expect(frameStrip("").ticks).toEqual([]);
  });
});

test("axes get round values", () => {
  expect(roundTicks(0, 65, 5)).toEqual([0, 20, 40, 60]);
  expect(roundTicks(-0.2, 3.4)).toEqual([0, 1, 2, 3]);
  expect(roundTicks(0, 0.3, 5)).toEqual([0, 0.1, 0.2, 0.3]);
  expect(roundTicks(5, 5)).toEqual([5]);
  expect(tickDigits([0, 0.25, 0.5])).toBe(2);
  expect(tickDigits([0, 20])).toBe(0);
});

describe("what the view shows", () => {
  const roles = frameRoles(result);
  const plan = (selected: number[], mode: "overlay" | "side" | "one" = "overlay", held = new Set([7])) =>
    viewPlan({ rows: pentaneRows, roles, held, selected, mode, alignedOn: "aligned on heavy atoms" });

  test("all kept conformers overlaid, the chosen ones first and the others from the most populated down", () => {
    const { frames, caption, notDrawn } = plan([3]);
    expect(frames.map((f) => [f.frame, f.selected])).toEqual([
      [3, true],
      [2, false],
      [1, false],
      [4, false],
    ]);
    expect(caption).toEqual({ strong: "Overlay", rest: "of 4, aligned on heavy atoms" });
    expect(notDrawn).toBe(0);
  });

  test("a repeat is laid over the conformer it repeats, and the caption says how near", () => {
    const { frames, caption } = plan([2, 5]);
    expect(frames.map((f) => [f.frame, f.laidOver])).toEqual([
      [2, false],
      [5, true],
    ]);
    expect(caption).toEqual({
      strong: "Frame 5",
      rest: `laid over c2: mirror image, RMSD below 0.001${NBSP}Å`,
    });
  });

  test("of a pair the hand and the distance are named, whichever it is", () => {
    const around = { roles, held: new Set([7]), mode: "overlay" as const };
    const said = (frames: number[], mirror: boolean, exact = true) => {
      const apart = new Map(frames.slice(1).map((frame) => [frame, { rmsd: 0.3652, mirror, exact }]));
      const { strong, rest } = laidOverCaption(frames, { ...around, apart });
      return `${strong} ${rest}`;
    };
    expect(said([2, 1], true)).toBe(`c1 laid over c2: mirror image, RMSD 0.365${NBSP}Å`);
    expect(said([2, 1], false)).toBe(`c1 laid over c2: same hand, RMSD 0.365${NBSP}Å`);
    expect(said([2, 1], false, false)).toBe(`c1 laid over c2: same hand, RMSD at most 0.365${NBSP}Å`);
    expect(said([2, 1, 4], true)).toBe(
      `c2 with c1 (mirror image, RMSD 0.365${NBSP}Å) and c4 (mirror image, RMSD 0.365${NBSP}Å) laid over it`,
    );
    // What is held is no conformer, and is never compared as one.
    expect(said([2, 7], true)).toBe("Frame 7 laid over c2: held");
  });

  test("a held frame stands alone and is named so", () => {
    expect(plan([7])).toMatchObject({
      frames: [{ frame: 7, held: true, laidOver: false }],
      caption: { strong: "Frame 7", rest: "held" },
    });
  });

  test("one, and side by side up to four", () => {
    expect(plan([2, 1], "one").frames.map((f) => f.frame)).toEqual([2]);
    expect(plan([], "one").frames.map((f) => f.frame)).toEqual([1]);
    expect(plan([1, 2, 3, 4], "side")).toMatchObject({ caption: { strong: "c1, c2, c3 and c4" } });
  });

  test("of very many the most populated are drawn, and the rest counted", () => {
    const many = Array.from({ length: 1000 }, (_, k) => ({
      ...pentane[0]!,
      frame: k + 1,
      relativeEnergy: k / 100,
    }));
    const manyRows = conformerRows(many, distinctPopulations(many, "electronic", 298.15), 3);
    const { frames, notDrawn, caption } = viewPlan({
      rows: manyRows,
      roles: new Map(),
      held: new Set(),
      selected: [900],
      mode: "overlay",
      alignedOn: "aligned on heavy atoms",
    });
    expect(frames).toHaveLength(300);
    expect(notDrawn).toBe(700);
    expect(caption.rest).toContain("the 300 most populated of 1,000");
  });
});

describe("lists of intake", () => {
  const frame = (number: number, holdReason: string | null, note: string, releasable = false): FrameView => ({
    number,
    file: 0,
    line: 1,
    label: null,
    state: holdReason === null ? "remarked" : "held",
    holdReason,
    note,
    releasable,
    showable: true,
  });

  test("frames with the same words stand together, those a person decides on by themselves", () => {
    const groups = groupFrames([
      frame(1, "waits-for-answer", "Waits.", true),
      frame(2, "waits-for-answer", "Waits.", true),
      frame(3, "far-off", "Far off.", true),
      frame(4, "far-off", "Far off.", true),
      frame(5, "other-species", "H25 moved."),
    ]);
    expect(groups.map((group) => group.frames.map((f) => f.number))).toEqual([[1, 2], [3], [4], [5]]);
  });

  test("runs of frames are drawn together", () => {
    expect(framesWords([7])).toBe("Frame 7");
    expect(framesWords([1, 2, 3, 7])).toBe("Frames 1 to 3, 7");
    expect(framesWords([42, 77, 160])).toBe("Frames 42, 77, 160");
    expect(framesWords([5, 4])).toBe("Frames 4, 5");
    expect(framesWords([1, 3, 5, 7, 9, 11, 13, 15])).toBe("Frames 1, 3, 5, 7, 9, 11 and 2 more");
  });

  test("every reason has its words", () => {
    expect(reasonWords("other-species")).toBe("Another species");
    expect(reasonWords(null)).toBe("Held");
  });
});

describe("settings that differ", () => {
  test("are named one by one, as they are and as they would be by default", () => {
    const changed = { ...recipe, rmsdTolerance: 1.2, atoms: "all" as const, window: 5 };
    expect(settingsApart(changed, defaultsOf(changed))).toEqual([
      { is: `RMSD tolerance 1.200${NBSP}Å`, was: `RMSD tolerance 0.200${NBSP}Å` },
      { is: `energy window 5.00${NBSP}kcal/mol`, was: "no energy window" },
      { is: "all atoms", was: "heavy atoms and polar H" },
    ]);
    expect(settingsApart(defaultsOf(changed), defaultsOf(changed))).toEqual([]);
  });

  test("chirality by choice goes back to what was found, with its mirror images", () => {
    const taken = { ...defaultsOf(recipe), chirality: "achiral" as const, chiralityOverridden: true };
    expect(defaultsOf(taken)).toMatchObject({ chirality: "chiral", mirror: "keep" });
  });
});

describe("stations of the course line", () => {
  const sift: SiftView = {
    id: "eeeeeeeeeeeeeeee",
    status: "done",
    progress: 1,
    recipe,
    result,
    error: null,
    createdAt: "2026-12-01T12:00:00Z",
    current: true,
  };
  const figures = (e: EnsembleView, s: SiftView | null) =>
    stations(e, s, 298.15).map((station) => `${station.path}: ${station.figure}, ${station.state}`);

  test("each section has its one figure", () => {
    expect(figures(ensemble, sift)).toEqual([
      "intake: 397 of 400, 3 held, care",
      "distinct-set: 4 of 7, done",
      `populations: 298.15${NBSP}K, done`,
      "levels: no energies, todo",
      "averages: no property, todo",
      "trust: no sign of gaps, done",
      "hand-over: CSV, XYZ, SDF, JSON, done",
      "logbook: who did what, done",
    ]);
  });

  test("a tolerance that merges different shapes leaves nothing to say of gaps", () => {
    const wide = { ...sift, recipe: { ...recipe, rmsdTolerance: 99 } };
    expect(figures(ensemble, wide)).toContain("trust: wide tolerance, care");
  });

  test("before there are results they say what comes first", () => {
    expect(figures({ ...ensemble, openQuestions: 2 }, null).slice(0, 3)).toEqual([
      "intake: 2 questions open, care",
      "distinct-set: after intake, todo",
      "populations: after intake, todo",
    ]);
    expect(figures(ensemble, { ...sift, status: "running", result: null })[1]).toBe(
      "distinct-set: under way, todo",
    );
    expect(figures(ensemble, null)[1]).toBe("distinct-set: not yet, todo");
    expect(figures(ensemble, { ...sift, status: "cancelled", result: null })[1]).toBe(
      "distinct-set: cancelled, todo",
    );
  });

  test("a set in file order has no populations", () => {
    const bare = { ...sift, recipe: { ...recipe, level: null, levelName: null } };
    expect(figures(ensemble, bare)[2]).toBe("populations: no energies, todo");
  });
});
