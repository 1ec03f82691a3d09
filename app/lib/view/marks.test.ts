import { describe, expect, it } from "vitest";
import { homeCamera, IDENTITY, zoomBy } from "./camera.ts";
import type { Mark } from "./mark.ts";
import { type MarkInput, scaleBar, viewMarks } from "./marks.ts";
import { buildScene, type ViewConformer } from "./scene.ts";
import { cellOf, projector, stageOf } from "./stage.ts";

/** A flat zigzag of C1, C2, N3, S4: torsion 180°. */
const elements = [6, 6, 7, 16];
const bonds = [0, 1, 1, 2, 2, 3];
const zigzag = Float64Array.of(-2, 0.5, 0, -0.7, -0.4, 0, 0.7, 0.4, 0, 2, -0.5, 0);

function marksOf(
  change: Partial<MarkInput> = {},
  options: { mode?: "overlay" | "side"; conformers?: ViewConformer[] } = {},
) {
  const conformers = options.conformers ?? [
    { frame: 11, name: "c1", positions: zigzag, population: 0.285, selected: true },
    { frame: 12, name: "c2", positions: Float64Array.from(zigzag), population: 0.1, selected: true },
  ];
  const scene = buildScene({
    elements,
    bonds,
    conformers,
    alignOn: null,
    hydrogens: "polar",
    mode: options.mode ?? "overlay",
  });
  const stage = stageOf(scene, IDENTITY, 420, 392);
  const camera = homeCamera(IDENTITY);
  const marks = viewMarks({ scene, stage, camera, picked: [], pickText: null, numbers: false, ...change });
  return { marks, scene, stage, camera };
}

const texts = (marks: Mark[]) => marks.flatMap((mark) => (mark.kind === "text" ? [mark.text] : []));
const of = <K extends Mark["kind"]>(marks: Mark[], kind: K, stroke: string) =>
  marks.filter(
    (mark): mark is Extract<Mark, { kind: K }> =>
      mark.kind === kind && "stroke" in mark && mark.stroke === stroke,
  );

describe("scale bar", () => {
  it("is 5 Å in five fields and grows with the zoom", () => {
    const { stage, camera } = marksOf();
    const width = (zoom: number) => {
      const boxes = scaleBar(stage, zoomBy(camera, zoom)).filter((mark) => mark.kind === "box");
      expect(boxes).toHaveLength(5);
      return boxes.reduce((sum, box) => sum + box.width, 0);
    };
    expect(width(1)).toBeCloseTo(5 * stage.scale, 9);
    expect(width(0.5)).toBeCloseTo(2.5 * stage.scale, 9);
  });

  it("takes the next round length where 5 Å do not fit", () => {
    const { stage, camera } = marksOf();
    expect(texts(scaleBar(stage, zoomBy(camera, 6)))[1]).toBe("0.5\u00a0Å");
    expect(texts(scaleBar({ ...stage, scale: 4 }, camera))[1]).toBe("20\u00a0Å");
  });
});

describe("picked atoms", () => {
  it("get a ring each, a path and the value in a box off the molecule", () => {
    const { marks, scene, stage, camera } = marksOf({ picked: [0, 1, 2, 3] });
    expect(of(marks, "ring", "mark")).toHaveLength(4);
    const lines = of(marks, "line", "mark");
    expect(lines.map(({ points }) => points.length)).toEqual([2, 4]);
    expect(texts(marks)).toContain("C1\u2013C2\u2013N3\u2013S4 180°");
    const box = of(marks, "box", "mark")[0]!;
    const project = projector(stage, camera, cellOf(stage, 0));
    for (const atom of scene.shown) {
      const { x, y } = project(zigzag, atom);
      expect(x > box.x && x < box.x + box.width && y > box.y && y < box.y + box.height).toBe(false);
    }
    expect(box.x).toBeGreaterThanOrEqual(0);
    expect(box.x + box.width).toBeLessThanOrEqual(stage.width);
  });

  it("say what the page says where it has a text", () => {
    const { marks } = marksOf({ picked: [0, 3], pickText: "C1\u2013S4 4.12 Å" });
    expect(texts(marks)).toContain("C1\u2013S4 4.12 Å");
  });

  it("alone are named", () => {
    expect(texts(marksOf({ picked: [2] }).marks)).toContain("N3");
  });

  it("are marked in every cell side by side, each with its own value and its name and share on top", () => {
    const bent = Float64Array.from(zigzag);
    bent[11] = 1.5;
    const { marks } = marksOf(
      { picked: [0, 1, 2, 3] },
      {
        mode: "side",
        conformers: [
          { frame: 11, name: "c1", positions: zigzag, population: 0.285, selected: true },
          { frame: 12, positions: bent, population: null, selected: true },
        ],
      },
    );
    expect(of(marks, "ring", "mark")).toHaveLength(8);
    const said = texts(marks);
    expect(said).toContain("180°");
    expect(said.filter((text) => text.endsWith("°"))).toHaveLength(2);
    expect(said).toContain("c1 28.5\u00a0%");
    expect(said).toContain("frame 12");
  });
});

describe("other marks", () => {
  it("number every shown atom on demand, with a halo", () => {
    const { marks } = marksOf({ numbers: true });
    const names = marks.filter((mark) => mark.kind === "text" && mark.halo && /^[A-Z]/.test(mark.text));
    expect(texts(names).sort()).toEqual(["C1", "C2", "N3", "S4"]);
  });

  it("ring what moved in buff, dash the bond it left, and say so", () => {
    const { marks } = marksOf(
      {},
      {
        conformers: [
          {
            frame: 3,
            positions: zigzag,
            population: null,
            selected: true,
            tone: "held",
            bonds: [0, 1, 1, 2, 1, 3],
          },
        ],
      },
    );
    expect(of(marks, "ring", "held-edge").length).toBeGreaterThan(0);
    expect(of(marks, "line", "held-edge").filter(({ dash }) => dash)).toHaveLength(1);
    expect(texts(marks)).toContain("N3\u2013S4 broken, C2\u2013S4 formed");
  });

  it("leave an empty view empty", () => {
    expect(marksOf({}, { conformers: [] }).marks).toEqual([]);
  });
});
