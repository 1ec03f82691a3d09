import { atomName } from "../chem/elements.ts";
import { formatPercent } from "../format.ts";
import { formatMeasure, measureKind, measureLabel, measureValue } from "../measure/measure.ts";
import type { Camera } from "./camera.ts";
import { type Ghost, ghostMarks } from "./ghost.ts";
import { boxOnLeader, type Spot } from "./leader.ts";
import type { Mark } from "./mark.ts";
import type { Figure, Scene } from "./scene.ts";
import { type Cell, cellOf, type Point, projector, type Stage } from "./stage.ts";

/** Everything that is laid over the molecules: picks and measures, names, what is held, the scale bar. */

export interface MarkInput {
  scene: Scene;
  stage: Stage;
  camera: Camera;
  /** Atoms from 0, up to four. */
  picked: readonly number[];
  /** Text of the box for the first figure where the page has one; else it is measured here. */
  pickText: string | null;
  numbers: boolean;
  /** False leaves the scale bar out. */
  bar?: boolean;
  /** A structure from outside, over the first figure. */
  ghost?: Ghost | null;
  /** Atom under the pointer. */
  hovered?: { atom: number; figure: Figure } | null;
}

/** All marks of a view, in the order in which they are painted. */
export function viewMarks(input: MarkInput): Mark[] {
  const { scene, stage, camera } = input;
  const marks: Mark[] = [];
  scene.strong.forEach((figure, place) => {
    // Laid over one another, marks on every figure would hide the molecules: the first one speaks.
    if (place > 0 && scene.mode !== "side") return;
    const cell = cellOf(stage, place);
    const project = projector(stage, camera, cell);
    if (input.ghost && place === 0)
      marks.push(...ghostMarks(input.ghost, figure, new Set(scene.shown), project));
    const spot: Spot = { scene, stage, cell, figure, at: (atom) => project(figure.positions, atom) };
    if (input.numbers) marks.push(...numberMarks(spot, input.picked));
    marks.push(...changeMarks(spot), ...pickMarks(spot, input, place));
    if (scene.mode === "side" && scene.strong.length > 1) marks.push(cellLabel(cell, figure));
  });
  if (input.hovered && !input.picked.includes(input.hovered.atom))
    marks.push(...hoverMarks(input, input.hovered));
  if (input.bar !== false && scene.strong.length > 0) marks.push(...scaleBar(stage, camera));
  return marks;
}

const BAR_LENGTHS = [5, 2, 1, 0.5, 10, 20, 50] as const;

/** A bar in five fields, as on a chart: 5 Å where that fits, else the next round length. */
export function scaleBar(stage: Stage, camera: Camera): Mark[] {
  const scale = stage.scale * camera.zoom;
  const length = BAR_LENGTHS.find((l) => l * scale >= 50 && l * scale <= 0.8 * stage.width) ?? 5;
  const field = (length * scale) / 5;
  const [x, y] = [stage.cells[0]!.x, stage.height - 14];
  const fields = Array.from(
    { length: 5 },
    (_, k): Mark => ({
      kind: "box",
      x: x + k * field,
      y,
      width: field,
      height: 4,
      stroke: "ink-2",
      fill: k % 2 === 0 ? "ink-2" : "view",
    }),
  );
  const figure = (text: string, at: number, anchor: "start" | "end"): Mark => ({
    kind: "text",
    x: at,
    y: y - 5,
    text,
    fill: "ink-3",
    anchor,
    halo: true,
  });
  return [...fields, figure("0", x, "start"), figure(`${length}\u00a0Å`, x + 5 * field, "end")];
}

/** "c2" and its population, at the top of its cell. */
function cellLabel(cell: Cell, figure: Figure): Mark {
  const share = figure.population === null ? "" : ` ${formatPercent(figure.population, 1)}`;
  return {
    kind: "text",
    x: cell.x,
    y: cell.y + 12,
    text: `${figure.name}${share}`,
    fill: "ink",
    anchor: "start",
    strong: true,
    halo: true,
  };
}

function numberMarks({ scene, at }: Spot, picked: readonly number[]): Mark[] {
  return [...scene.shown]
    .map((atom) => ({ atom, point: at(atom) }))
    .sort((a, b) => a.point.z - b.point.z)
    .map(({ atom, point }) => ({
      kind: "text",
      x: point.x + 5,
      y: point.y - 5,
      text: atomName(scene.elements, atom),
      fill: picked.includes(atom) ? "mark" : "ink",
      anchor: "start",
      halo: true,
    }));
}

function hoverMarks(input: MarkInput, hovered: { atom: number; figure: Figure }): Mark[] {
  const place = input.scene.strong.indexOf(hovered.figure);
  if (place < 0) return [];
  const { x, y } = projector(
    input.stage,
    input.camera,
    cellOf(input.stage, place),
  )(hovered.figure.positions, hovered.atom);
  return [
    { kind: "ring", x, y, radius: 6, stroke: "mark", fill: null, width: 1 },
    {
      kind: "text",
      x: x + 9,
      y: y - 7,
      text: atomName(input.scene.elements, hovered.atom),
      fill: "mark",
      anchor: "start",
      strong: true,
      halo: true,
    },
  ];
}

/** Magenta path and rings over the picked atoms, and the value in a box on a leader set off the molecule. */
function pickMarks(spot: Spot, input: MarkInput, place: number): Mark[] {
  const { scene, stage, figure, at } = spot;
  const picked = input.picked.filter((atom) => atom >= 0 && atom < scene.elements.length);
  if (picked.length === 0) return [];
  const points = picked.map(at);
  const marks: Mark[] = [];
  const full = place === 0 && input.pickText ? input.pickText : pickText(scene, figure, picked);
  // Side by side the same atoms are named once, below: each cell has room for its figure only.
  const text = stage.cells.length > 1 ? (valueText(figure, picked) ?? full) : full;
  marks.push(...boxOnLeader(spot, middleOf(points), text, { stroke: "mark", fill: "view", ink: "mark" }));
  if (points.length > 1) {
    marks.push({ kind: "line", points: points.map((p) => [p.x, p.y] as const), stroke: "mark", width: 2 });
  }
  for (const { x, y } of points) {
    marks.push({ kind: "ring", x, y, radius: 4, stroke: "mark", fill: "view", width: 1.75 });
  }
  return marks;
}

/** What the box says: names and value, or the name of a single atom. */
export function pickText(scene: Scene, figure: Figure, picked: readonly number[]): string {
  const label = measureLabel(scene.elements, picked);
  const value = valueText(figure, picked);
  return value === null ? label : `${label} ${value}`;
}

function valueText(figure: Figure, picked: readonly number[]): string | null {
  const kind = measureKind(picked);
  return kind === null ? null : formatMeasure(kind, measureValue(figure.positions, picked));
}

/** Of four the middle bond, of three the apex, of two the middle. */
function middleOf(points: readonly Point[]): Point {
  const [from, to] = points.length === 4 ? [1, 2] : points.length === 3 ? [1, 1] : [0, points.length - 1];
  const [a, b] = [points[from]!, points[to]!];
  return { x: (a.x + b.x) / 2, y: (a.y + b.y) / 2, z: (a.z + b.z) / 2 };
}

/** Buff ring on what moved, the bond it left dashed, and what happened in words. */
function changeMarks(spot: Spot): Mark[] {
  const { figure, at } = spot;
  const { change } = figure;
  if (!change) return [];
  const marks: Mark[] = [];
  for (let k = 0; k + 1 < change.broken.length; k += 2) {
    const [a, b] = [at(change.broken[k]!), at(change.broken[k + 1]!)];
    marks.push({
      kind: "line",
      points: [
        [a.x, a.y],
        [b.x, b.y],
      ],
      stroke: "held-edge",
      width: 1.75,
      dash: [4, 3],
    });
  }
  for (const atom of change.moved) {
    const { x, y } = at(atom);
    marks.push({ kind: "ring", x, y, radius: 9, stroke: "held-edge", fill: null, width: 2 });
  }
  const first = change.moved[0];
  if (first === undefined) return marks;
  const look = { stroke: "held-edge", fill: "held-ground", ink: "held" } as const;
  return [...marks, ...boxOnLeader(spot, at(first), change.words, look)];
}
