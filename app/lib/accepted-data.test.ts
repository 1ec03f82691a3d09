import { describe, expect, it } from "vitest";
import { packAccepted, unpackAccepted } from "./accepted-data.ts";

const positions = Float64Array.from({ length: 3 * 3 * 2 }, (_, k) => k / 7);
const numbers = Int32Array.of(1, 4, 9);
const molecule = {
  elements: Uint8Array.of(1, 17),
  isotopes: Uint16Array.of(2, 0),
  bonds: Int32Array.of(0, 1),
};

describe("accepted frames as bytes", () => {
  it.each([
    ["with energies", { values: Float64Array.of(-1e6, 0, 3.25), present: Uint8Array.of(1, 0, 1) }],
    ["without", null],
  ])("come back bit by bit, %s", (_, energies) => {
    const data = { ...molecule, numbers, energies, positions };
    expect(unpackAccepted(packAccepted(data).buffer)).toEqual(data);
  });

  it("are refused when they are cut off or of another version", () => {
    const bytes = packAccepted({ ...molecule, numbers, energies: null, positions });
    expect(() => unpackAccepted(bytes.slice(0, -8).buffer)).toThrow("3 frames of 2 atoms");
    expect(() => unpackAccepted(new ArrayBuffer(4))).toThrow(RangeError);
    bytes[0] = 9;
    expect(() => unpackAccepted(bytes.buffer)).toThrow("version 9");
  });
});
