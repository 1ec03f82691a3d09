import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { COPIED, readReference } from "../../../tests/factories/reference.ts";
import { BondFinder, perceiveBonds } from "./bonds.ts";
import { COVALENT_RADII } from "./elements.ts";

const line = (...xs: number[]): number[] => xs.flatMap((x) => [x, 0, 0]);

describe("perceiveBonds", () => {
  it("bonds up to 1.20 of the summed radii, contests up to 1.35, and sees nothing beyond", () => {
    const carbons = Uint8Array.of(6, 6);
    const sum = 2 * 0.76;
    expect([...perceiveBonds(carbons, line(0, 1.2 * sum - 1e-9)).bonds]).toEqual([0, 1]);
    expect([...perceiveBonds(carbons, line(0, 1.2 * sum + 1e-9)).contested]).toEqual([0, 1]);
    expect([...perceiveBonds(carbons, line(0, 1.35 * sum - 1e-9)).contested]).toEqual([0, 1]);
    const far = perceiveBonds(carbons, line(0, 1.35 * sum + 1e-9));
    expect([far.bonds.length, far.contested.length]).toEqual([0, 0]);
  });

  it("reports the nearest pair below 0.5 Å and bonds nothing there", () => {
    const found = perceiveBonds(Uint8Array.of(6, 6, 6), line(0, 0.45, 0.15));
    expect(found.closest).toEqual({ i: 0, j: 2, distance: 0.15 });
    expect([...found.bonds]).toEqual([]);
    expect(perceiveBonds(Uint8Array.of(1, 1), line(0, 0.74)).closest).toBeNull();
  });

  // Bond lengths of bicyclo[1.1.1]pentane about C-C 1.55 Å, bridgeheads 1.87 Å apart (from memory).
  it("does not bond across bicyclo[1.1.1]pentane", () => {
    const bridges = [0, 120, 240].flatMap((deg) => [
      1.24 * Math.cos((deg * Math.PI) / 180),
      1.24 * Math.sin((deg * Math.PI) / 180),
      0,
    ]);
    const found = perceiveBonds(new Uint8Array(5).fill(6), [0, 0, 0.935, 0, 0, -0.935, ...bridges]);
    expect([...found.bonds]).toEqual([0, 2, 0, 3, 0, 4, 1, 2, 1, 3, 1, 4]);
    expect([...found.contested]).toEqual([0, 1]);
  });

  it("leaves dummies out, even on top of an atom", () => {
    const found = perceiveBonds(Uint8Array.of(6, 0, 8), line(0, 0, 1.2));
    expect([...found.bonds]).toEqual([0, 2]);
    expect(found.closest).toBeNull();
  });

  it("gives elements beyond the table of radii no bonds", () => {
    expect([...perceiveBonds(Uint8Array.of(98, 8), line(0, 1.8)).bonds]).toEqual([]);
  });

  it("reads from an offset", () => {
    expect([...perceiveBonds(Uint8Array.of(8, 1), [9, 9, 9, ...line(0, 0.96)], 3).bonds]).toEqual([0, 1]);
  });
});

describe("hydrogens between two partners", () => {
  it("a shared proton stays with the nearer oxygen", () => {
    const found = perceiveBonds(Uint8Array.of(8, 1, 8), line(0, 1.21, 2.41));
    expect([...found.bonds]).toEqual([1, 2]);
    expect([...found.contested]).toEqual([0, 1]);
    expect([...found.shared]).toEqual([1, 2, 0]);
  });

  it("F-H-F: of two equal distances the first partner is kept", () => {
    const found = perceiveBonds(Uint8Array.of(9, 1, 9), line(0, 1.15, 2.3));
    expect([...found.bonds]).toEqual([0, 1]);
    expect([...found.shared]).toEqual([1, 0, 2]);
  });

  it("two bonds by the rule become one", () => {
    const found = perceiveBonds(Uint8Array.of(8, 1, 8), line(0, 1.15, 2.29));
    expect([...found.bonds]).toEqual([1, 2]);
    expect([...found.contested]).toEqual([0, 1]);
  });

  it("bridges between borons stay", () => {
    expect([...perceiveBonds(Uint8Array.of(5, 1, 5), line(0, 1.33, 2.66)).bonds]).toEqual([0, 1, 1, 2]);
  });

  it("one long distance alone makes no bond", () => {
    const found = perceiveBonds(Uint8Array.of(8, 1), line(0, 1.2));
    expect([found.bonds.length, found.contested.length, found.shared.length]).toEqual([0, 2, 0]);
  });
});

/** The rule by looking at every pair, without any of the finder's ways. */
function plainly(elements: Uint8Array, xyz: readonly number[]): { bonds: number[]; contested: number[] } {
  const bonds: number[] = [];
  const contested: number[] = [];
  for (let i = 0; i < elements.length; i++) {
    for (let j = i + 1; j < elements.length; j++) {
      const d = Math.hypot(...[0, 1, 2].map((k) => xyz[3 * i + k]! - xyz[3 * j + k]!));
      const sum = COVALENT_RADII[elements[i]!]! + COVALENT_RADII[elements[j]!]!;
      if (d > 0.5 && d <= 1.2 * sum) bonds.push(i, j);
      else if (d > 1.2 * sum && d <= 1.35 * sum) contested.push(i, j);
    }
  }
  return { bonds, contested };
}

it("the grid finds what looking at every pair finds", () => {
  const clouds = fc.record({
    count: fc.integer({ min: 201, max: 320 }),
    side: fc.double({ min: 4, max: 400, noNaN: true }),
    seed: fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { minLength: 7, maxLength: 7 }),
  });
  fc.assert(
    fc.property(clouds, ({ count, side, seed }) => {
      const xyz = Array.from({ length: 3 * count }, (_, k) => side * ((seed[k % 7]! + k * 0.6180339887) % 1));
      const elements = Uint8Array.from({ length: count }, (_, k) => [6, 7, 8, 17, 14][k % 5]!);
      const found = perceiveBonds(elements, xyz);
      expect({ bonds: [...found.bonds], contested: [...found.contested] }).toEqual(plainly(elements, xyz));
    }),
    { seed: 20261201, numRuns: 60 },
  );
});

it("a finder used again finds in every frame what a fresh one finds", () => {
  const kinds = [6, 1, 1, 1, 8, 1, 7, 6, 17, 1];
  // A rough chain with hydrogens beside it: shaken a little it keeps its bonds, shaken more it does not.
  const rest = (count: number): number[] =>
    Array.from({ length: count }, (_, k) => {
      const heavy = kinds[k % kinds.length] !== 1;
      return heavy ? [1.4 * (k / 2.5), 0, 0] : [1.4 * (Math.floor(k / 10) * 4), Math.sin(k), Math.cos(k)];
    }).flat();
  const shakes = fc.array(
    fc.record({
      size: fc.constantFrom(0, 0.01, 0.05, 0.2, 1),
      seed: fc.integer({ min: 1, max: 1000 }),
      // From this atom on everything may lie far away.
      cut: fc.option(fc.integer({ min: 1, max: 40 })),
    }),
    { minLength: 2, maxLength: 12 },
  );
  let same = 0;
  fc.assert(
    fc.property(fc.integer({ min: 2, max: 40 }), shakes, (count, frames) => {
      const elements = Uint8Array.from({ length: count }, (_, k) => kinds[k % kinds.length]!);
      const finder = new BondFinder(elements);
      let before = "";
      for (const { size, seed, cut } of frames) {
        const away = (k: number) => (cut !== null && k >= 3 * cut && k % 3 === 0 ? 30 : 0);
        const xyz = rest(count).map((v, k) => v + size * Math.sin(seed * (k + 1)) + away(k));
        finder.find(xyz);
        const fresh = perceiveBonds(elements, xyz);
        const found = finder.bonds.slice(0, 2 * finder.bondCount);
        expect(found).toEqual(fresh.bonds);
        expect(finder.contested.slice(0, 2 * finder.contestedCount)).toEqual(fresh.contested);
        expect(finder.shared.slice(0, 3 * finder.sharedCount)).toEqual(fresh.shared);
        expect(finder.closestDistance < 0.5).toBe(fresh.closest !== null);
        if (before === found.join() && found.length > 0) same += 1;
        before = found.join();
      }
    }),
    { seed: 20261203, numRuns: 500 },
  );
  expect(same).toBeGreaterThan(500);
});

it("frames of real ensembles have the same bonds one after the other as one by one", () => {
  for (const [file, expected] of COPIED) {
    const { frames } = readReference(file, expected);
    const stride = 3 * frames.block.atoms;
    const finder = new BondFinder(frames.elements);
    for (let k = 0; k < Math.min(100, frames.block.count); k++) {
      finder.find(frames.block.positions, k * stride);
      const fresh = perceiveBonds(frames.elements, frames.block.positions, k * stride);
      expect(finder.bonds.slice(0, 2 * finder.bondCount)).toEqual(fresh.bonds);
      expect(finder.contested.slice(0, 2 * finder.contestedCount)).toEqual(fresh.contested);
    }
  }
});

it("a finder used again forgets the frame before", () => {
  const finder = new BondFinder(Uint8Array.of(8, 1, 8));
  finder.find(line(0, 1.21, 2.41));
  finder.find(line(0, 0.1, 5));
  expect([finder.bondCount, finder.contestedCount, finder.sharedCount]).toEqual([0, 0, 0]);
  finder.find(line(0, 0.96, 5));
  expect([finder.bondCount, finder.closestDistance]).toEqual([1, Infinity]);
});
