import { formatPercent } from "../format.ts";
import { homeCamera } from "../view/camera.ts";
import type { Figure, Scene } from "../view/scene.ts";
import { projector } from "../view/stage.ts";
import type { EditionContent } from "./content.ts";
import { editionRows } from "./rows.ts";
import { layOutShapes } from "./shape-layout.ts";
import { shownRows } from "./shown.ts";
import { Drawing, INK } from "./svg.ts";

const CELL = { width: 260, height: 160 };
/** Shapes drawn, as on the page. */
const SHAPES = 4;
const ATOMS: Record<number, string> = {
  1: "#8a9297",
  6: "#454f57",
  7: "#2a52c9",
  8: "#c3261c",
  9: "#3f8a1f",
  15: "#b85a00",
  16: "#967200",
  17: "#107a3e",
  35: "#8e3b1f",
  53: "#7a2fa3",
};
const OTHER = "#6b6f73";

/** The most populated shapes side by side, as sticks in atom colours; null where there is none. */
export function shapesFigure(content: EditionContent, positions: Float64Array) {
  const rows = editionRows(content);
  const length = 3 * content.ensemble.atoms;
  const conformers = shownRows(content, SHAPES).flatMap((row) => {
    const found = rows[row];
    return found ? [{ ...found, positions: positions.slice(row * length, (row + 1) * length) }] : [];
  });
  const laid = layOutShapes(content.ensemble, conformers, CELL.width, CELL.height, "polar");
  if (laid === null) return null;
  const across = Math.min(2, laid.figures.length);
  const down = Math.ceil(laid.figures.length / across);
  const title = content.populations === null ? "The first shapes" : "The most populated shapes";
  const drawing = new Drawing(
    across * CELL.width + 32,
    down * (CELL.height + 36) + 64,
    title,
    `${content.ensemble.name}; hydrogens on N, O, S and P only`,
  );
  for (const [k, { figure, stage, rotation }] of laid.figures.entries()) {
    const left = 16 + (k % across) * CELL.width;
    const top = 52 + Math.floor(k / across) * (CELL.height + 36);
    const project = projector(stage, homeCamera(rotation), {
      x: left,
      y: top,
      width: CELL.width,
      height: CELL.height,
    });
    drawSticks(drawing, laid.scene, figure, project, stage.scale);
    const share = figure.population === null ? "" : `  ${formatPercent(figure.population, 1)}`;
    drawing.text(left + CELL.width / 2, top + CELL.height + 16, `${figure.name}${share}`, {
      anchor: "middle",
      fill: INK.ink,
      strong: true,
    });
  }
  return { name: "shapes", title, svg: drawing.toString() };
}

/** Farthest back first, as paint is laid on; each stick on a rim of the ground, so that crossings read. */
function drawSticks(
  drawing: Drawing,
  { elements, shown }: Scene,
  { positions, bonds }: Figure,
  project: ReturnType<typeof projector>,
  scale: number,
): void {
  const colour = (atom: number) => ATOMS[elements[atom] ?? 0] ?? OTHER;
  const width = Math.max(1.5, 0.2 * scale);
  const sticks: { a: number; b: number; z: number }[] = [];
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const [a, b] = [bonds[k]!, bonds[k + 1]!];
    sticks.push({ a, b, z: (project(positions, a).z + project(positions, b).z) / 2 });
  }
  sticks.sort((one, other) => one.z - other.z || one.a - other.a);
  for (const { a, b } of sticks) {
    const [from, to] = [project(positions, a), project(positions, b)];
    const half = [(from.x + to.x) / 2, (from.y + to.y) / 2] as const;
    drawing.line([from.x, from.y], [to.x, to.y], INK.ground, width + 3, "butt");
    drawing.line([from.x, from.y], half, colour(a), width);
    drawing.line(half, [to.x, to.y], colour(b), width);
  }
  const balls = [...shown]
    .filter((atom) => ![1, 6].includes(elements[atom] ?? 0))
    .map((atom) => ({ atom, ...project(positions, atom) }))
    .sort((one, other) => one.z - other.z || one.atom - other.atom);
  for (const { atom, x, y } of balls) {
    drawing.circle(x, y, Math.max(2, 0.16 * scale), colour(atom), null);
  }
}
