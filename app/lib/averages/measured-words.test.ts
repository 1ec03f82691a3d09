import { describe, expect, it } from "vitest";
import { makeGraph } from "../structure.ts";
import { compareMeasured } from "./assignment.ts";
import { agreementCsv, besideCsv } from "./measured-csv.ts";
import { agreementWords, assignmentWords, scalingWords, unitWords } from "./measured-words.ts";
import { againstMeasured } from "./shielding-fit.ts";
import { waysToSplit } from "./split-ways.ts";
import { coveredShare, signalName } from "./words.ts";

const plain = (text: string) => text.replaceAll("\u00a0", " ");

describe("how well values meet the measured ones", () => {
  // d = 2 e + 1 throughout: the mean of |d - e| is 4, and nothing is left once the line is taken out.
  const five = againstMeasured([3, 5, 7, 9, 11], [1, 2, 3, 4, 5]);

  it("gives MAE, RMSE, largest, and from five values on line and corrected MAE", () => {
    expect(plain(agreementWords(five, "ppm", "C5", false))).toBe(
      "5 values: mean absolute error (MAE) 4.00 ppm, root mean square error (RMSE) 4.24 ppm, largest 6.00 ppm at C5. Against the measured values they run with slope m 2.000 and intercept b 1.00 ppm (n 5); mapped back by that line the corrected MAE is 0.00 ppm.",
    );
  });

  it("of properties in one unit has no more to say of one value than how far off it is", () => {
    expect(plain(unitWords(againstMeasured([7], [7.25])!, "Hz", "3J"))).toBe("1 value, off by 0.25 Hz.");
    expect(plain(unitWords(againstMeasured([3, 5], [1, 2])!, "Hz", "J2"))).toBe(
      "2 values: mean absolute error (MAE) 2.50 Hz, root mean square error (RMSE) 2.55 Hz, largest 3.00 Hz at J2.",
    );
    expect(plain(unitWords(five!, "Hz", "J5"))).toContain("with slope m 2.000 and intercept b 1.00 Hz (n 5)");
  });

  it("says what is missing below five, and that a line fitted to these very values corrects nothing", () => {
    const four = againstMeasured([3, 5, 7, 9], [1, 2, 3, 4]);
    expect(agreementWords(four, null, "C4", false)).toContain("From 5 values on they are corrected");
    expect(agreementWords(five, null, "C5", true)).toContain("the corrected MAE is the same");
    expect(agreementWords(null, null, "", false)).toBe("Nothing measured yet.");
    expect(plain(scalingWords({ slope: -1.02, intercept: 188.2, n: 4, from: "fitted" }))).toBe(
      "Line fitted to 4 measured shifts: slope −1.0200, intercept 188.20 ppm.",
    );
  });

  it("says which assignment was chosen, with the errors of both", () => {
    const pair = { swapped: true, entered: { pairMad: 0.55 }, exchanged: { pairMad: 0.05 } };
    expect(plain(assignmentWords("H4 and H5", pair, "ppm"))).toBe(
      "H4 and H5: assigned swapped (mean error of the two 0.05 ppm; as entered 0.55 ppm).",
    );
  });
});

describe("files of measured values", () => {
  const group = (atom: number, z: number, average: number, measured: number | null) => ({
    ...{ atom, z, average, measured },
    error: null,
  });
  const compared = compareMeasured(
    [group(4, 1, 1.75, 1.25), group(5, 1, 1.25, 1.75), group(1, 6, 30, 32), group(2, 6, 50, null)],
    { shieldings: false, scaling: new Map(), pairs: [[4, 5]], swapped: new Set([4]) },
  );
  const table = { quantity: "shift", unit: "ppm", nameOf: (atom: number) => `A${atom}`, ...compared };

  it("hold a group a row and an assignment a row, the nuclei apart", () => {
    expect(besideCsv([table]).split("\r\n").slice(1)).toEqual([
      "shift,ppm,H,A4,1.75,1.75,,1.75,0,swapped,,",
      "shift,ppm,H,A5,1.25,1.25,,1.25,0,swapped,,",
      "shift,ppm,C,A1,30,30,,32,-2,,,",
      "shift,ppm,C,A2,50,50,,,,,,",
      "",
    ]);
    expect(agreementCsv([table]).split("\r\n").slice(1)).toEqual([
      "shift,ppm,H,all,as chosen,2,0,0,0,A4,,,",
      "shift,ppm,C,all,as chosen,1,2,2,2,A1,,,",
      "shift,ppm,H,A4 and A5,as entered,2,0.5,,,,,,",
      "shift,ppm,H,A4 and A5,swapped (chosen),2,0,,,,,,",
      "",
    ]);
  });
});

describe("files that leave the page", () => {
  it("say temperature, level and weights, and error, draws and seed of the uncertainty", () => {
    const compared = compareMeasured([{ atom: 1, z: 6, average: 30, error: null, measured: 32 }], {
      shieldings: false,
      scaling: new Map(),
      pairs: [],
      swapped: new Set(),
    });
    const table = { quantity: "shift", unit: "ppm", nameOf: () => "C1", ...compared };
    const facts = {
      ...{ temperatureK: 298.15, level: "M", weights: "copies" },
      ...{ sigma: 0.5, draws: 2000, seed: 7 },
    };
    for (const text of [besideCsv([table], facts), agreementCsv([table], facts)]) {
      const [head, row] = text.split("\r\n");
      expect(head).toMatch(/,temperature \[K\],level,weights,sigma \[kcal\/mol\],draws,seed$/);
      expect(row).toMatch(/,298\.15,M,copies,0\.5,2000,7$/);
    }
    // Without facts, as editions write them: their bytes stay as they were frozen.
    expect(besideCsv([table]).split("\r\n")[0]).toMatch(/,slope,intercept$/);
  });
});

describe("ways to take a group apart", () => {
  /** N0 with two methyls, C1 and C2. */
  const amine = makeGraph(
    Uint8Array.of(7, 6, 6, 1, 1, 1, 1, 1, 1),
    Int32Array.of(0, 1, 0, 2, 1, 3, 1, 4, 1, 5, 2, 6, 2, 7, 2, 8),
  );

  it("are by what carries the atoms, and each on its own", () => {
    expect(waysToSplit(amine, [3, 4, 5, 6, 7, 8])).toEqual([
      {
        way: "carrier",
        parts: [
          [3, 4, 5],
          [6, 7, 8],
        ],
      },
      { way: "each", parts: [[3], [4], [5], [6], [7], [8]] },
    ]);
    expect(waysToSplit(amine, [1, 2])).toEqual([{ way: "each", parts: [[1], [2]] }]);
    expect(waysToSplit(amine, [3, 4, 5]).map(({ way }) => way)).toEqual(["each"]);
    expect(waysToSplit(amine, [3])).toEqual([]);
  });
});

describe("words of coverage and of signals", () => {
  it("never read 100.0 % where a value is missing", () => {
    expect(coveredShare(0.999988)).toBe("above 99.9");
    expect(coveredShare(0.9994)).toBe("99.9");
    expect(coveredShare(1)).toBe("100.0");
  });
  it("name the atom that carries a hydrogen", () => {
    const elements = [6, 1, 1, 6, 1];
    const bonds = [0, 1, 0, 2, 0, 3, 3, 4];
    expect(signalName([1, 2], elements, bonds)).toBe("H2, H3 (on C1)");
    expect(signalName([1, 4], elements, bonds)).toBe("H2, H5 (on C1, C4)");
    expect(signalName([0], elements, bonds)).toBe("C1");
  });
});
