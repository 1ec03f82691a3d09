import { describe, expect, test } from "vitest";
import { type FlatAtom, type FlatBond, flatLayout, freeDirection, innerSide } from "./flat-layout.ts";

const atom = (element: number, x: number, y: number, hydrogens = 0, charge = 0): FlatAtom => ({
  element,
  x,
  y,
  hydrogens,
  charge,
});
const bond = (from: number, to: number, order: 1 | 2 | 3 = 1, wedge: FlatBond["wedge"] = null): FlatBond => ({
  from,
  to,
  order,
  wedge,
  inner: 0,
});
const symbol = (element: number) => ({ 6: "C", 7: "N", 8: "O" })[element] ?? "?";
const BOX = { width: 200, height: 84 };

describe("flat drawing", () => {
  test("carbon with neighbours stays unlabelled; bonds stop short of letters", () => {
    // Ethanol without hydrogens on carbon: C-C-O.
    const drawing = flatLayout(
      [atom(6, 0, 0), atom(6, 1, 0.5), atom(8, 2, 0, 1)],
      [bond(0, 1), bond(1, 2)],
      BOX,
      symbol,
    );
    expect(drawing.labels.map((label) => [label.symbol, label.hydrogens, label.side])).toEqual([
      ["O", 1, "right"],
    ]);
    const [cc, co] = drawing.lines;
    expect(cc!.x2).toBeCloseTo(co!.x1, 9);
    const oxygen = drawing.labels[0]!;
    expect(Math.hypot(co!.x2 - oxygen.x, co!.y2 - oxygen.y)).toBeCloseTo(7, 6);
  });

  test("everything lies inside the box, however large the molecule", () => {
    const chain = Array.from({ length: 40 }, (_, k) => atom(6, k, k % 2));
    const bonds = chain.slice(1).map((_, k) => bond(k, k + 1));
    const drawing = flatLayout(chain, bonds, BOX, symbol);
    expect(drawing.width).toBeLessThanOrEqual(BOX.width + 1e-9);
    expect(drawing.height).toBeLessThanOrEqual(BOX.height + 1e-9);
    for (const line of drawing.lines) {
      expect(Math.min(line.x1, line.x2)).toBeGreaterThanOrEqual(0);
      expect(Math.max(line.x1, line.x2)).toBeLessThanOrEqual(drawing.width);
    }
  });

  test("double and triple bonds have two and three lines, wedges their own shapes", () => {
    const atoms = [atom(6, 0, 0), atom(8, 1, 0)];
    expect(flatLayout(atoms, [bond(0, 1, 2)], BOX, symbol).lines).toHaveLength(2);
    expect(flatLayout(atoms, [bond(0, 1, 3)], BOX, symbol).lines).toHaveLength(3);
    const up = flatLayout(atoms, [bond(0, 1, 1, "up")], BOX, symbol);
    expect([up.lines.length, up.wedges.length]).toEqual([0, 1]);
    expect(flatLayout(atoms, [bond(0, 1, 1, "down")], BOX, symbol).lines.length).toBeGreaterThan(3);
  });

  test("hydrogens turn away from the bonds", () => {
    // An amine nitrogen between two carbons, both below it: its hydrogen stands above.
    const drawing = flatLayout(
      [atom(6, -1, 1), atom(7, 0, 0, 1), atom(6, 1, 1)],
      [bond(0, 1), bond(1, 2)],
      BOX,
      symbol,
    );
    expect(drawing.labels[0]!.side).toBe("above");
    const left = flatLayout([atom(8, 0, 0, 1), atom(6, 1, 0)], [bond(0, 1)], BOX, symbol);
    expect(left.labels[0]!.side).toBe("left");
  });

  test("the second line of a ring's double bond lies inside the ring, that of a carbonyl in the middle", () => {
    const ring = Array.from({ length: 6 }, (_, k) => ({
      x: Math.cos((k * Math.PI) / 3),
      y: Math.sin((k * Math.PI) / 3),
    }));
    const bonds = ring.map((_, k) => ({ from: k, to: (k + 1) % 6 }));
    // The centre lies left of every bond walked this way round, and y runs down: the sign is the same for all.
    expect(new Set(bonds.map((_, k) => innerSide(ring, bonds, k))).size).toBe(1);
    expect(innerSide(ring, bonds, 0)).not.toBe(0);
    const carbonyl = [
      { x: 0, y: 0 },
      { x: 0, y: 1 },
      { x: 1, y: -0.5 },
      { x: -1, y: -0.5 },
    ];
    const around = [
      { from: 0, to: 1 },
      { from: 0, to: 2 },
      { from: 0, to: 3 },
    ];
    expect(innerSide(carbonyl, around, 0)).toBe(0);
  });
});

describe("the room for a number beside an atom", () => {
  test("lies opposite a lone bond, and in the widest gap between several", () => {
    const at = { x: 1, y: 1 };
    const alone = freeDirection(at, [{ x: 2, y: 1 }]);
    expect(alone.x).toBeCloseTo(-1, 12);
    expect(alone.y).toBeCloseTo(0, 12);
    // Two bonds of a ring, 120 degrees apart: outside it.
    const ring = freeDirection(at, [
      { x: 1 + Math.cos(Math.PI / 3), y: 1 + Math.sin(Math.PI / 3) },
      { x: 1 + Math.cos(Math.PI / 3), y: 1 - Math.sin(Math.PI / 3) },
    ]);
    expect(ring.x).toBeCloseTo(-1, 12);
    expect(freeDirection(at, [])).toEqual({ x: 0, y: -1 });
  });
});
