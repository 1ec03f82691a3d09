import { describe, expect, it } from "vitest";
import { type LogbookEntry, logbookEntrySchema } from "./entries.ts";
import { describeShared, OWN_KINDS, SHARED_KINDS } from "./shared.ts";

const kinds = logbookEntrySchema.options.map(({ shape }) => shape.type.value);

describe("the edition's part of the logbook", () => {
  it("tells what made its numbers, and nothing of people, access, links and other editions (D04)", () => {
    const told = new Set<string>([...SHARED_KINDS, ...OWN_KINDS]);
    for (const kind of ["batch", "column-removed", "column-restored", "atoms-split", "atoms-joined"]) {
      expect(told, kind).toContain(kind);
    }
    for (const kind of ["measured-kept", "outside-added", "outside-removed", "outside-restored"]) {
      expect(told, kind).toContain(kind);
    }
    const closed =
      /^(sign|password|team|invit|joined|role|person|sessions|address|account|token|link|export|remark)/;
    for (const kind of kinds.filter((one) => closed.test(one))) expect(told, kind).not.toContain(kind);
    expect(OWN_KINDS).toEqual(["edition-frozen"]);
  });

  it("names no other ensemble", () => {
    const data = { ensembleId: "0190", name: "Secret amide", frames: [4, 5, 6], count: 3 };
    const off = describeShared({ type: "split-off", data });
    expect(off).toEqual({ text: "Made another ensemble of 3 held frames", detail: "Frames 4 to 6" });
    const from = describeShared({ type: "split-from", data });
    expect(from?.text).toBe("Made of 3 held frames of another ensemble");
    expect(JSON.stringify([off, from])).not.toContain("amide");
  });

  it("says of a second file what members read, and of a remark nothing", () => {
    const counts = { frames: 10, accepted: 9, remarked: 0, held: 1 };
    const batch: LogbookEntry = {
      type: "batch",
      data: {
        batch: 2,
        name: null,
        files: [{ name: "second.xyz", sha256: "0".repeat(64), bytes: 10 }],
        answers: { energyUnit: "hartree", energyFrom: null, level: "MMFF94" },
        added: counts,
      },
    };
    expect(describeShared(batch)?.text).toBe("Added batch 2: 10 frames: 9 accepted, 1 held");
    expect(describeShared(batch)?.detail).toContain("second.xyz");
    expect(describeShared({ type: "remark", data: { text: "call them" } })).toBeNull();
  });
});
