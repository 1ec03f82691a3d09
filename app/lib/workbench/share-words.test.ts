import { describe, expect, it } from "vitest";
import { sharesWords, shareWords } from "./findings.ts";

const plain = (text: string) => text.replace(/\s/g, " ");

describe("a share in a sentence", () => {
  it("never claims a half, 90, 95 or 99 % that is not reached", () => {
    const shares = [0.949, 0.9496, 0.95, 0.986, 0.4996, 0.8951, 0.989999];
    expect(shares.map((share) => plain(shareWords(share)))).toEqual([
      ...["94.9 %", "94.9 %", "95 %", "98.6 %", "49.9 %", "89.5 %", "98.9 %"],
    ]);
  });

  it("agrees with the decimal of the table, and with the other shares of its sentence", () => {
    expect(plain(shareWords(0.5346))).toBe("53.5 %");
    expect(sharesWords([0.949, 0.53]).map(plain)).toEqual(["94.9 %", "53.0 %"]);
    expect(sharesWords([0.69, 0.29]).map(plain)).toEqual(["69 %", "29 %"]);
    expect(sharesWords([0.997, 0.5346]).map(plain)).toEqual(["more than 99 %", "53.5 %"]);
  });
});
