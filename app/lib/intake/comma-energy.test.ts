import { describe, expect, it } from "vitest";
import { commaEnergy } from "./comma-energy.ts";

describe("an energy with a decimal comma (row X22)", () => {
  it.each([
    ["energy=-15,775161", "-15,775161"],
    ["E = -76,0267 Eh", "-76,0267"],
    ["  -76,0267 ", "-76,0267"],
    ["conf 3 energy: -1,5e-3", "-1,5e-3"],
  ])("%j holds %s", (comment, text) => {
    expect(commaEnergy(comment)).toBe(text);
  });

  it.each(["energy=-15.7", "E = -1,234.5", "conf 1, 2", "time=1,5", 'Properties="species,1"', "1.234,5", ""])(
    "%j holds none",
    (comment) => {
      expect(commaEnergy(comment)).toBeNull();
    },
  );
});
