import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { aboutAxis, homeCamera, IDENTITY, zoomBy } from "./camera.ts";
import { buildScene, type SceneInput } from "./scene.ts";
import { atomAt, cellOf, projector, stageOf } from "./stage.ts";

const elements = [6, 6, 8];
const line = Float64Array.of(-2, 0, 0, 0, 0, 0, 2, 0, 0);

function input(change: Partial<SceneInput> = {}): SceneInput {
  const conformers = [1, 2, 3, 4].map((frame) => ({
    frame,
    positions: Float64Array.from(line),
    population: 0.25,
    selected: true,
  }));
  return {
    elements,
    bonds: [0, 1, 1, 2],
    conformers,
    alignOn: null,
    hydrogens: "polar",
    mode: "overlay",
    ...change,
  };
}

describe("stageOf", () => {
  it("fits every atom into the box in its home rotation, in any size and turn", () => {
    const turn = fc.double({ min: -3, max: 3, noNaN: true });
    fc.assert(
      fc.property(
        fc.integer({ min: 160, max: 1400 }),
        fc.integer({ min: 120, max: 900 }),
        turn,
        (width, height, t) => {
          const scene = buildScene(input());
          const home = aboutAxis([0.3, 0.2, 1], t);
          const stage = stageOf(scene, home, width, height);
          const project = projector(stage, homeCamera(home), cellOf(stage, 0));
          for (const atom of [0, 1, 2]) {
            const { x, y } = project(line, atom);
            expect(x).toBeGreaterThan(0);
            expect(x).toBeLessThan(width);
            expect(y).toBeGreaterThan(0);
            expect(y).toBeLessThan(height);
          }
        },
      ),
      { seed: 20261201 },
    );
  });

  it("stands up to four figures apart, in cells that do not overlap", () => {
    const stage = stageOf(buildScene(input({ mode: "side" })), IDENTITY, 420, 392);
    expect(stage.cells).toHaveLength(4);
    stage.cells.forEach((a, i) => {
      expect(a.x + a.width).toBeLessThanOrEqual(420);
      for (const b of stage.cells.slice(i + 1)) {
        const apart =
          a.x + a.width <= b.x + 1e-9 || b.x + b.width <= a.x + 1e-9 || a.y + a.height <= b.y + 1e-9;
        expect(apart).toBe(true);
      }
    });
  });

  it("stacks long figures and does not blow up small ones", () => {
    const two = input({ mode: "side" });
    const stage = stageOf(buildScene({ ...two, conformers: two.conformers.slice(0, 2) }), IDENTITY, 420, 392);
    expect(stage.cells[1]!.y).toBeGreaterThan(stage.cells[0]!.y);
    expect(stage.scale).toBeLessThanOrEqual(0.15 * 392);
  });

  it("has a cell and a scale without conformers too", () => {
    const stage = stageOf(buildScene(input({ conformers: [] })), IDENTITY, 420, 392);
    expect(stage.cells).toHaveLength(1);
    expect(Number.isFinite(stage.scale)).toBe(true);
  });
});

describe("atomAt", () => {
  const scene = buildScene(input({ conformers: input().conformers.slice(0, 1) }));
  const stage = stageOf(scene, IDENTITY, 420, 392);
  const camera = homeCamera(IDENTITY);
  const place = (atom: number) => projector(stage, camera, cellOf(stage, 0))(line, atom);

  it("finds the atom under the pointer, and none beside it", () => {
    const { x, y } = place(2);
    expect(atomAt(scene, stage, camera, x + 3, y - 3, 12)?.atom).toBe(2);
    expect(atomAt(scene, stage, camera, x + 40, y, 12)).toBeNull();
  });

  it("takes the upper one of two that hide each other", () => {
    const turned = homeCamera(aboutAxis([0, 1, 0], Math.PI / 2));
    const { x, y } = projector(stage, turned, cellOf(stage, 0))(line, 0);
    expect(projector(stage, turned, cellOf(stage, 0))(line, 0).z).toBeCloseTo(2, 6);
    expect(atomAt(scene, stage, turned, x, y, 12)?.atom).toBe(0);
  });

  it("follows the zoom", () => {
    const near = zoomBy(camera, 2);
    const { x } = projector(stage, near, cellOf(stage, 0))(line, 2);
    expect(x - stage.width / 2).toBeCloseTo(2 * (place(2).x - stage.width / 2), 6);
  });
});
