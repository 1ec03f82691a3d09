import { describe, expect, it } from "vitest";
import { makeGraph } from "../structure.ts";
import { assignmentPairs, compareMeasured } from "./assignment.ts";
import { splitClasses } from "./atom-groups.ts";

/** Two CH2 groups at the ends of a chain, C0–C1–C2, as in glycerol: four hydrogens of one colour. */
const chain = makeGraph(
  Uint8Array.of(6, 6, 6, 1, 1, 1, 1, 8, 8),
  Int32Array.of(0, 1, 1, 2, 0, 3, 0, 4, 2, 5, 2, 6, 0, 7, 2, 8),
);

const group = (atom: number, average: number, measured: number | null, z = 1) => ({
  atom,
  z,
  average,
  error: null,
  measured,
});
const options = { shieldings: false, scaling: new Map(), swapped: new Set<number>() };

describe("pairs that could be assigned either way", () => {
  it("are the nearest of those that the bonds make alike", () => {
    expect(assignmentPairs(chain, [[3], [4], [5], [6]])).toEqual([
      [0, 1],
      [2, 3],
    ]);
    expect(assignmentPairs(chain, [[0], [2], [1]])).toEqual([[0, 1]]);
  });

  it("are none among groups of different size, nor of one group alone", () => {
    expect(assignmentPairs(chain, [[3, 4], [5]])).toEqual([]);
    expect(assignmentPairs(chain, [[3, 4, 5, 6]])).toEqual([]);
  });
});

describe("both assignments of a pair", () => {
  // Worked by hand: |1.8 - 1.2| and |1.2 - 1.7| as entered, |1.8 - 1.7| and |1.2 - 1.2| exchanged; H 9 deviates by 0.3.
  const groups = [group(4, 1.8, 1.2), group(5, 1.2, 1.7), group(9, 3.3, 3), group(1, 30, 32, 6)];
  const pairs: [number, number][] = [[4, 5]];

  it("give their errors, whichever was chosen", () => {
    for (const swapped of [new Set<number>(), new Set([4])]) {
      const { pairs: found, nuclei } = compareMeasured(groups, { ...options, pairs, swapped });
      expect(found).toHaveLength(1);
      expect(found[0]).toMatchObject({ atoms: [4, 5], z: 1, swapped: swapped.has(4) });
      expect(found[0]!.entered.pairMad).toBeCloseTo(0.55, 12);
      expect(found[0]!.exchanged.pairMad).toBeCloseTo(0.05, 12);
      expect(found[0]!.entered.nucleus.mad).toBeCloseTo(1.4 / 3, 12);
      expect(found[0]!.exchanged.nucleus.mad).toBeCloseTo(0.4 / 3, 12);
      const chosen = swapped.has(4) ? found[0]!.exchanged : found[0]!.entered;
      expect(nuclei[0]!.agreement).toEqual(chosen.nucleus);
      expect(nuclei[0]!.groups.map(({ measured }) => measured)).toEqual(
        swapped.has(4) ? [1.7, 1.2, 3] : [1.2, 1.7, 3],
      );
    }
  });

  it("leave the other nucleus as it is", () => {
    const { nuclei } = compareMeasured(groups, { ...options, pairs, swapped: new Set([4]) });
    expect(nuclei[1]).toMatchObject({ z: 6, agreement: { n: 1, mad: 2 } });
  });

  it("are not told where a value is missing or both are equal", () => {
    const one = [group(4, 1.8, 1.2), group(5, 1.2, null)];
    expect(compareMeasured(one, { ...options, pairs }).pairs).toEqual([]);
    const same = [group(4, 1.8, 1.2), group(5, 1.2, 1.2)];
    expect(compareMeasured(same, { ...options, pairs }).pairs).toEqual([]);
  });
});

describe("groups taken apart by hand", () => {
  const classes = [0, 1, 1, 1, 1, 5];

  it("keep the atoms of a part together, and those that no part names", () => {
    expect([...splitClasses(classes, [[[1, 2], [3]]])]).toEqual([0, 1, 1, 3, 4, 5]);
    expect([
      ...splitClasses(classes, [
        [
          [1, 2],
          [3, 4],
        ],
      ]),
    ]).toEqual([0, 1, 1, 3, 3, 5]);
  });

  it("are taken apart again, and never join what symmetry holds apart", () => {
    const twice = [
      [
        [1, 2],
        [3, 4],
      ],
      [[3], [4]],
    ];
    expect([...splitClasses(classes, twice)]).toEqual([0, 1, 1, 3, 4, 5]);
    expect([...splitClasses(classes, [[[0, 5], [1]]])]).toEqual([0, 1, 2, 2, 2, 5]);
    expect([...splitClasses(classes, [])]).toEqual(classes);
  });
});
