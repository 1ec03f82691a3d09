import { describe, expect, it } from "vitest";
import { buildScene, type SceneInput, type ViewConformer } from "./scene.ts";

/** Methanol: C1, O2, H3 on O2, H4 to H6 on C1. */
const elements = [6, 8, 1, 1, 1, 1];
const bonds = [0, 1, 1, 2, 0, 3, 0, 4, 0, 5];
const positions = Float64Array.of(
  0,
  0,
  0,
  1.4,
  0,
  0,
  1.8,
  0.9,
  0,
  -0.4,
  1,
  0,
  -0.4,
  -0.5,
  0.9,
  -0.4,
  -0.5,
  -0.9,
);

function conformer(frame: number, change: Partial<ViewConformer> = {}): ViewConformer {
  return { frame, positions: Float64Array.from(positions), population: 0.1, selected: false, ...change };
}

function scene(change: Partial<SceneInput> = {}) {
  return buildScene({
    elements,
    bonds,
    conformers: [conformer(1)],
    alignOn: null,
    hydrogens: "polar",
    mode: "overlay",
    ...change,
  });
}

const frames = (figures: { frame: number }[]) => figures.map(({ frame }) => frame);

describe("who stands in atom colours", () => {
  const conformers = [
    conformer(11, { population: 0.02 }),
    conformer(12, { population: 0.5 }),
    conformer(13, { population: 0.3 }),
    conformer(14, { population: null }),
    conformer(15, { population: 0.3 }),
    conformer(16, { population: 0.01 }),
  ];
  const select = (...chosen: number[]) =>
    conformers.map((one) => ({ ...one, selected: chosen.includes(one.frame) }));

  it("is the most populated while nothing is selected; the others follow weakest first", () => {
    const { strong, faint } = scene({ conformers });
    expect(frames(strong)).toEqual([12]);
    expect(frames(faint)).toEqual([14, 16, 11, 15, 13]);
  });

  it("are the selected ones in the order of the list, four at most", () => {
    const { strong, faint, selectedBeyond } = scene({ conformers: select(16, 11, 13, 14, 15) });
    expect(frames(strong)).toEqual([11, 13, 14, 15]);
    expect(frames(faint)).toEqual([16, 12]);
    expect(selectedBeyond).toBe(1);
  });

  it("stand alone side by side and as one", () => {
    const side = scene({ conformers: select(13, 16), mode: "side" });
    expect([frames(side.strong), frames(side.faint)]).toEqual([[13, 16], []]);
    const one = scene({ conformers: select(13, 16), mode: "one" });
    expect([frames(one.strong), frames(one.faint)]).toEqual([[13], []]);
  });

  it("are filled up by the most populated where one alone stands side by side", () => {
    expect(frames(scene({ conformers: select(16), mode: "side" }).strong)).toEqual([16, 12, 13, 15]);
  });

  it("is nobody without conformers", () => {
    expect(scene({ conformers: [] })).toMatchObject({ strong: [], faint: [] });
  });

  it("carries its tint step, or none where the population is not known", () => {
    const { strong, faint } = scene({ conformers });
    expect(strong[0]?.step).toBe(7);
    expect(faint.map(({ step }) => step)).toEqual([null, 2, 3, 6, 6]);
  });
});

describe("what is drawn", () => {
  it.each([
    ["none", [0, 1], 1],
    ["polar", [0, 1, 2], 2],
    ["all", [0, 1, 2, 3, 4, 5], 5],
  ] as const)("with hydrogens %s: atoms %j and %i bonds", (hydrogens, atoms, count) => {
    const { shown, strong } = scene({ hydrogens });
    expect([...shown]).toEqual(atoms);
    expect(strong[0]?.bonds).toHaveLength(2 * count);
  });

  it("shows a picked hydrogen whatever is hidden", () => {
    expect([...scene({ hydrogens: "none", always: [4] }).shown]).toEqual([0, 1, 4]);
  });

  it("shows hydrogen where there is nothing else", () => {
    const { shown } = scene({
      elements: [1, 1],
      bonds: [0, 1],
      conformers: [conformer(1, { positions: Float64Array.of(0, 0, 0, 0.74, 0, 0) })],
      hydrogens: "none",
    });
    expect([...shown]).toEqual([0, 1]);
  });

  it("takes single precision as well", () => {
    const { strong } = scene({ conformers: [conformer(1, { positions: Float32Array.from(positions) })] });
    expect(strong[0]?.positions[3]).toBeCloseTo(1.4, 6);
  });

  it("refuses coordinates of another molecule", () => {
    expect(() => scene({ conformers: [conformer(7, { positions: new Float64Array(6) })] })).toThrow(
      /Frame 7 has 6 coordinates where 6 atoms ask for 18/,
    );
  });

  it("draws a frame with its own bonds, and the hydrogen that moved though hydrogens are hidden", () => {
    // H4 has gone from C1 to O2.
    const own = [0, 1, 1, 2, 1, 3, 0, 4, 0, 5];
    const { strong, shown } = scene({
      hydrogens: "none",
      conformers: [conformer(233, { bonds: own, selected: true, tone: "held" })],
    });
    expect([...shown]).toEqual([0, 1, 3]);
    expect([...(strong[0]?.bonds ?? [])]).toEqual([0, 1, 1, 3]);
    expect(strong[0]).toMatchObject({ held: true, change: { words: "H4 now on O2" } });
  });
});
