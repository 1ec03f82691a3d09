import { describe, expect, it } from "vitest";
import { describeEntry, type LogbookEntry, logbookEntrySchema } from "./entries.ts";

const counts = { frames: 1_200, accepted: 1_197, remarked: 5, held: 3 };
const open = { energyUnit: null, energyFrom: null, level: null };
const recipe = {
  levelName: "MMFF94",
  window: 3,
  energyTolerance: null,
  rmsdTolerance: 0.2,
  atoms: "heavy+polarH",
  mirror: "merge",
};

/** Rows as they were written once: they must go on parsing and having a sentence. */
const WRITTEN: [LogbookEntry, string, string | null][] = [
  [
    {
      type: "intake",
      data: {
        name: "A",
        files: [{ name: "a.xyz", sha256: "00", bytes: 9 }],
        answers: open,
        questions: 2,
        ...counts,
      },
    },
    "Read a.xyz",
    "1,200 frames: 1,197 accepted, 5 of them with a remark, 3 held; 2 questions open",
  ],
  [
    {
      type: "reread",
      data: {
        before: open,
        after: { energyUnit: "eV", energyFrom: "key:E", level: "M" },
        questions: 0,
        ...counts,
      },
    },
    "Read the files again with other answers: level M, unit eV, energy from key:E",
    "before: level open, unit open, energy from open; 1,200 frames: 1,197 accepted, 5 of them with a remark, 3 held",
  ],
  [
    {
      type: "answer",
      data: { question: "energy-unit", text: "In which unit?", option: "eV", optionText: "eV", released: 1 },
    },
    "Answered: eV",
    "In which unit? 1 frame released.",
  ],
  [
    {
      type: "link-exported",
      data: { linkId: "l", number: 2, prefix: "abcd", label: "Partner", file: "a.xyz", source: true },
    },
    "Took the source file a.xyz of edition 2",
    "for the first time that day",
  ],
  [{ type: "hold", data: { frame: 4, reason: "no minimum" } }, "Held frame 4", "no minimum"],
  [
    { type: "release", data: { frame: 4, reason: "it is one", heldFor: "by-hand" } },
    "Released frame 4",
    "it is one",
  ],
  [
    { type: "release-refused", data: { frame: 9, reason: "please", why: "it is another molecule." } },
    "Asked to release frame 9; refused",
    "it is another molecule.",
  ],
  [
    { type: "split-off", data: { ensembleId: "a", name: "Acid, other tautomer", frames: [7, 8], count: 2 } },
    "Made an ensemble of 2 held frames: Acid, other tautomer",
    "Frames 7, 8",
  ],
  [
    { type: "split-from", data: { ensembleId: "a", name: "Acid", frames: [7], count: 1 } },
    "Made of 1 held frame of Acid",
    "there frame 7",
  ],
  [
    { type: "sift", data: { siftId: "a", automatic: true, recipe } },
    "Sift begun after intake",
    "level MMFF94, RMSD 0.200\u00a0Å, no energy tolerance, window 3.00\u00a0kcal/mol, heavy atoms and polar hydrogens, mirror images merged",
  ],
  [{ type: "sift", data: { siftId: "a", automatic: false, recipe: { other: 1 } } }, "Asked for a sift", null],
  [
    { type: "sift", data: { siftId: "a", automatic: false, back: true, recipe: { other: 1 } } },
    "Went back to an earlier set",
    null,
  ],
  [
    {
      type: "token-made",
      data: { prefix: "lowl_b41e", name: "Night", scope: "add", endsAt: "2027-01-31T00:00:00Z" },
    },
    "Made token lowl_b41e…",
    "Night; add; ends 2027-01-31",
  ],
  [
    {
      type: "columns-added",
      data: {
        from: "dft.csv",
        sha256: "00",
        columns: [
          { id: "a", name: "DFT", kind: "energy", unit: "hartree", count: 6, replaced: false },
          { id: "b", name: "n", kind: "property", unit: null, count: 5, replaced: false },
        ],
        matched: "6 of 6 rows matched by frame number",
        answers: {},
      },
    },
    "Added DFT [hartree], n",
    "from dft.csv; 6 of 6 rows matched by frame number",
  ],
  [
    {
      type: "column-changed",
      data: { id: "a", name: "DFT", changes: [{ what: "kind", before: "electronic", after: "free" }] },
    },
    "Changed the column DFT",
    "kind: free (before: electronic)",
  ],
  [{ type: "column-removed", data: { id: "a", name: "DFT" } }, "Removed the column DFT", null],
  [{ type: "renamed", data: { before: "A", after: "B" } }, "Renamed to B", "before: A"],
  [{ type: "export", data: { siftId: "a", format: "xyz" } }, "Took the distinct set as XYZ", null],
  [{ type: "export", data: { siftId: "a", format: "averages csv" } }, "Took the averages as CSV", null],
  [
    { type: "atoms-split", data: { parts: [["H10", "H11"], ["H12"]] } },
    "Took equivalent atoms apart: H10, H11 and H12",
    "Each part is a signal of its own in averages.",
  ],
  [
    { type: "atoms-joined", data: { parts: [["H10", "H11"], ["H12"]] } },
    "Put equivalent atoms together again: H10, H11 with H12",
    null,
  ],
  [
    {
      type: "measured-kept",
      data: {
        quantity: "shift",
        unit: "ppm",
        count: 9,
        changes: [{ what: "C1", before: null, after: "77.3" }],
        more: 2,
      },
    },
    "Kept 9 measured values of shift, ppm",
    "C1: 77.3 (before: none); and 2 further changes",
  ],
  [{ type: "sign-in", data: {} }, "Signed in", null],
];

describe("an entry of the logbook", () => {
  it.each(WRITTEN)("%j", (entry, text, detail) => {
    const read = logbookEntrySchema.parse(JSON.parse(JSON.stringify(entry)));
    expect(describeEntry(read)).toEqual({ text, detail });
  });

  it("of an unknown kind does not parse, so that nothing is shown that nobody wrote", () => {
    expect(logbookEntrySchema.safeParse({ type: "exploded", data: {} }).success).toBe(false);
  });
});
