import { describe, expect, it } from "vitest";
import type { KeptConformer } from "../recipe/result.ts";
import { conformerRows } from "./conformers.ts";
import {
  batchesCell,
  foundByChoices,
  foundBySentence,
  foundByWords,
  isFoundBy,
  readFoundBy,
  writeFoundBy,
} from "./found-by.ts";

const files = [{ batch: 1 }, { batch: 2, batchName: "hot run" }];

function rowsOf(found: readonly number[][]) {
  const kept = found.map(
    (batches, k): KeptConformer => ({
      frame: k + 1,
      relativeEnergy: k / 2,
      degeneracy: 1,
      symmetryNumber: 1,
      copies: 1,
      mirrorRmsd: 1,
      found: batches.length,
      ...(batches.length > 0 ? { foundIn: batches.map((batch) => ({ batch, found: 1 })) } : {}),
    }),
  );
  return conformerRows(kept, null, null);
}

describe("which search found a conformer", () => {
  const rows = rowsOf([[1, 2], [1], [1], [2]]);

  it("narrows to one batch, to what it alone found, and to what several found", () => {
    const left = (text: string) => {
      const choice = readFoundBy(text);
      return choice && rows.filter((row) => isFoundBy(row, choice)).map(({ name }) => name);
    };
    expect(left("1")).toEqual(["c1", "c2", "c3"]);
    expect(left("only-1")).toEqual(["c2", "c3"]);
    expect(left("only-2")).toEqual(["c4"]);
    expect(left("several")).toEqual(["c1"]);
    expect(left("only-3")).toEqual([]);
    expect(["0", "only-", "2x", "-1", "", "only-999999"].map(readFoundBy)).toEqual(Array(6).fill(null));
    for (const text of ["2", "only-2", "several"]) {
      const choice = readFoundBy(text);
      expect(choice && writeFoundBy(choice)).toBe(text);
    }
  });

  it("offers each choice that leaves something, by the names of the batches", () => {
    expect(foundByChoices(rows, files)).toEqual([
      { value: "1", label: "Found by batch 1 (3)" },
      { value: "2", label: "Found by batch 2 “hot run” (2)" },
      { value: "only-1", label: "Found by batch 1 alone (2)" },
      { value: "only-2", label: "Found by batch 2 “hot run” alone (1)" },
      { value: "several", label: "Found by more than one batch (1)" },
    ]);
    expect(foundByWords({ kind: "only", batch: 2 }, files)).toBe("found by batch 2 “hot run” alone");
  });

  it("says what each found alone, and of a batch that found nothing new that too", () => {
    expect(foundBySentence(rows, files)).toBe(
      "Both batches found one conformer; batch 1 alone found 2 and batch 2 “hot run” alone found 1.",
    );
    expect(foundBySentence(rowsOf([[1, 2], [1]]), [{ batch: 1 }, { batch: 2 }])).toBe(
      "Both batches found one conformer; batch 1 alone found 1 and batch 2 alone found none.",
    );
  });

  it("says nothing where there was one search", () => {
    const single = rowsOf([[], []]);
    expect(foundBySentence(single, [{ batch: 1 }])).toBeNull();
    expect(foundByChoices(single, [{ batch: 1 }])).toEqual([]);
  });

  it("lists few batches in a cell and counts many", () => {
    expect([batchesCell([2], 2), batchesCell([1, 2], 2), batchesCell([1, 2, 3, 5], 8)]).toEqual([
      "2 only",
      "1, 2",
      "4 of 8",
    ]);
  });
});
