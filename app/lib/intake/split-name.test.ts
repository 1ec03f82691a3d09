import { describe, expect, it } from "vitest";
import { canBeSplitOff, splitName } from "./split-name.ts";

describe("splitName", () => {
  it("says the parent and the change, as the hold says it", () => {
    expect(splitName("Night run", "Another species (proton transfer): H14 has moved from N4 to O8.")).toBe(
      "Night run, proton transfer: H14 has moved from N4 to O8",
    );
    expect(splitName("Acid", "C5 has the other hand (R, the others S). The rest agrees.")).toBe(
      "Acid, C5 has the other hand (R, the others S)",
    );
    expect(splitName("Acid", null)).toBe("Acid, held frames");
    expect(splitName("mixed", "Another composition: C4H10, where the ensemble is C2H4F2.")).toBe(
      "mixed, C4H10",
    );
    expect(splitName("mixed", "Another charge: 1, where the ensemble has 0.")).toBe("mixed, charge: 1");
  });

  it("cuts the parent's name before the change, and never passes 200 characters", () => {
    const long = splitName("N".repeat(200), "Another species (ring): C1 and C6 are no longer bonded.");
    expect(long).toHaveLength(200);
    expect(long.endsWith("N, ring: C1 and C6 are no longer bonded")).toBe(true);
    expect(splitName("A", "x".repeat(900))).toHaveLength(200);
  });
});

describe("canBeSplitOff", () => {
  it("is for sound structures of something else", () => {
    expect(["other-species", "other-composition", "other-configuration"].every(canBeSplitOff)).toBe(true);
    expect(["unreadable", "by-hand", "waits-for-answer", "unclear", null].some(canBeSplitOff)).toBe(false);
  });
});
