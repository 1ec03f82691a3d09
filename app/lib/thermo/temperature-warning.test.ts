import { describe, expect, it } from "vitest";
import { temperatureWarning } from "./temperature-warning.ts";

const free = { name: "G", energyKind: "free", temperature: 298.15 } as const;

describe("populations at another temperature than that of the energies", () => {
  it("are warned of, and only they", () => {
    expect(temperatureWarning(free, 298.15)).toBeNull();
    expect(temperatureWarning(free, 310)).toContain(
      "“G” belong to 298.15 K, and these populations are taken at 310 K",
    );
    expect(temperatureWarning({ ...free, energyKind: "enthalpy" }, 310)).toContain("enthalpies of “G”");
    for (const energyKind of ["electronic", "zero-point"] as const) {
      expect(temperatureWarning({ ...free, energyKind }, 310)).toBeNull();
    }
  });

  it("are named all, where several are shown at once", () => {
    expect(temperatureWarning(free, 250, 298.15, 350)).toContain("are taken at 250 K and 350 K: ");
    expect(temperatureWarning({ ...free, temperature: null }, 250, 350)).toContain("it is 250 K or 350 K");
  });

  it("are warned of at any temperature where free energies do not say theirs", () => {
    expect(temperatureWarning({ ...free, temperature: null }, 298.15)).toContain("is not stated");
    expect(temperatureWarning({ ...free, energyKind: "enthalpy", temperature: null }, 298.15)).toBeNull();
  });
});
