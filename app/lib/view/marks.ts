import { atomName } from "../chem/elements.ts";
import { formatPercent } from "../format.ts";
import { formatMeasure, measureKind, measureLabel, measureValue } from "../measure/measure.ts";
import type { Camera } from "./camera.ts";
import type { DepthStep, Figure, Scene } from "./scene.ts";
import { type Cell, cellOf, type Point, projector, type Stage } from "./stage.ts";

/**
 * Everything that is laid over the molecules, as plain shapes in pixels: the page draws them as SVG, the picture as
 * canvas. Colours are names of design tokens, so that both follow the theme.
 */
export type Token =
  | "ink"
  | "ink-2"
  | "ink-3"
  | "rule"
  | "edge"
  | "view"
  | "mark"
  | "held"
  | "held-edge"
  | "held-ground"
  | `depth-${DepthStep}`
  | `atom-${"h" | "c" | "n" | "o" | "f" | "p" | "s" | "cl" | "br" | "i" | "other"}`;

export type Mark =
  | {
      kind: "line";
      points: readonly (readonly [number, number])[];
      stroke: Token;
      width: number;
      dash?: readonly [number, number];
    }
  | { kind: "ring"; x: number; y: number; radius: number; stroke: Token; fill: Token | null; width: number }
  | { kind: "box"; x: number; y: number; width: number; height: number; stroke: Token; fill: Token }
  | {
      kind: "text";
      x: number;
      y: number;
      text: string;
      fill: Token;
      anchor: "start" | "middle" | "end";
      strong?: boolean;
      /** Drawn over the molecule: needs a halo of the ground. */
      halo?: boolean;
    };

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
  /** Atom under the pointer. */
  hovered?: { atom: number; figure: Figure } | null;
}

/** All marks of a view, in the order in which they are painted. */
export function viewMarks(input: MarkInput): Mark[] {
  const { scene, stage, camera } = input;
  const marks: Mark[] = [];
  scene.strong.forEach((figure, place) => {
    const cell = cellOf(stage, place);
    const project = projector(stage, camera, cell);
    const at = (atom: number) => project(figure.positions, atom);
    // Laid over one another, marks on every figure would hide the molecules: the first one speaks.
    if (place > 0 && scene.mode !== "side") return;
    if (input.numbers) marks.push(...numberMarks(scene, at, input.picked));
    if (figure.change || figure.held) marks.push(...changeMarks(scene, stage, cell, figure, at));
    marks.push(...pickMarks(scene, stage, cell, input, figure, place, at));
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

function numberMarks(scene: Scene, at: (atom: number) => Point, picked: readonly number[]): Mark[] {
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
function pickMarks(
  scene: Scene,
  stage: Stage,
  cell: Cell,
  input: MarkInput,
  figure: Figure,
  place: number,
  at: (atom: number) => Point,
): Mark[] {
  const picked = input.picked.filter((atom) => atom >= 0 && atom < scene.elements.length);
  if (picked.length === 0) return [];
  const points = picked.map(at);
  const marks: Mark[] = [];
  const full = place === 0 && input.pickText ? input.pickText : pickText(scene, figure, picked);
  // Side by side the same atoms are named once, below: each cell has room for its figure only.
  const text = stage.cells.length > 1 ? (valueText(figure, picked) ?? full) : full;
  const anchor = middleOf(points);
  marks.push(...boxOnLeader(scene, stage, cell, figure, at, anchor, text, "mark", "view"));
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
function changeMarks(
  scene: Scene,
  stage: Stage,
  cell: Cell,
  figure: Figure,
  at: (atom: number) => Point,
): Mark[] {
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
  return [
    ...marks,
    ...boxOnLeader(
      scene,
      stage,
      cell,
      figure,
      at,
      at(first),
      change.words,
      "held-edge",
      "held-ground",
      "held",
    ),
  ];
}

const BOX_HEIGHT = 20;
/** Height of the line that names a cell. */
const CELL_HEAD = 18;

/** A text in a box off the molecule, joined to its place by a thin line. */
function boxOnLeader(
  scene: Scene,
  stage: Stage,
  cell: Cell,
  figure: Figure,
  at: (atom: number) => Point,
  anchor: Point,
  text: string,
  stroke: Token,
  fill: Token,
  ink: Token = stroke,
): Mark[] {
  const width = textWidth(text) + 12;
  const obstacles = [...scene.shown].map((atom) => at(atom));
  const middle = clearPlace(stage, cell, obstacles, middles(figure, at), anchor, width);
  const edge = towards(middle, anchor, width);
  return [
    {
      kind: "line",
      points: [
        [anchor.x, anchor.y],
        [edge.x, edge.y],
      ],
      stroke,
      width: 1,
    },
    {
      kind: "box",
      x: middle.x - width / 2,
      y: middle.y - BOX_HEIGHT / 2,
      width,
      height: BOX_HEIGHT,
      stroke,
      fill,
    },
    { kind: "text", x: middle.x, y: middle.y + 4, text, fill: ink, anchor: "middle", strong: true },
  ];
}

function middles(figure: Figure, at: (atom: number) => Point): Point[] {
  const found: Point[] = [];
  for (let k = 0; k + 1 < figure.bonds.length; k += 2) {
    const [a, b] = [at(figure.bonds[k]!), at(figure.bonds[k + 1]!)];
    found.push({ x: (a.x + b.x) / 2, y: (a.y + b.y) / 2, z: 0 });
  }
  return found;
}

const DIRECTIONS = 24;
const REACHES = [40, 62, 90, 125, 165] as const;

/** The nearest place for a box that covers no atom or bond and stays inside the cell; else the one that covers least. */
function clearPlace(
  stage: Stage,
  cell: Cell,
  atoms: readonly Point[],
  bonds: readonly Point[],
  anchor: Point,
  width: number,
): { x: number; y: number } {
  const several = stage.cells.length > 1;
  const bounds = {
    left: cell.x - (several ? 0 : 8) + width / 2,
    right: cell.x + cell.width - (several ? 4 : -8) - width / 2,
    top: cell.y + (several ? CELL_HEAD : 0) + BOX_HEIGHT / 2,
    bottom: cell.y + cell.height - BOX_HEIGHT / 2,
  };
  let best = { x: anchor.x, y: anchor.y, cost: Number.POSITIVE_INFINITY };
  for (const reach of REACHES) {
    for (let k = 0; k < DIRECTIONS; k++) {
      const turn = (2 * Math.PI * k) / DIRECTIONS;
      const x = clamp(anchor.x + reach * Math.sin(turn), bounds.left, bounds.right);
      const y = clamp(anchor.y + reach * Math.cos(turn), bounds.top, bounds.bottom);
      const covers = (p: Point) =>
        Math.abs(p.x - x) < width / 2 + 8 && Math.abs(p.y - y) < BOX_HEIGHT / 2 + 8;
      const hidden = atoms.filter(covers).length + bonds.filter(covers).length;
      const crossed = atoms.filter((p) => nearSegment(p, anchor, { x, y }) && p !== anchor).length;
      const cost = 1000 * hidden + 25 * crossed + Math.hypot(x - anchor.x, y - anchor.y);
      if (cost < best.cost) best = { x, y, cost };
    }
  }
  return best;
}

function nearSegment(p: Point, a: { x: number; y: number }, b: { x: number; y: number }): boolean {
  const [dx, dy] = [b.x - a.x, b.y - a.y];
  const length = dx * dx + dy * dy;
  if (length === 0) return false;
  const t = ((p.x - a.x) * dx + (p.y - a.y) * dy) / length;
  return t > 0.15 && t < 1 && Math.hypot(p.x - a.x - t * dx, p.y - a.y - t * dy) < 6;
}

/** Where the leader meets the box. */
function towards(middle: { x: number; y: number }, anchor: Point, width: number): { x: number; y: number } {
  const [dx, dy] = [anchor.x - middle.x, anchor.y - middle.y];
  const share = Math.min(
    dx === 0 ? 1 : width / 2 / Math.abs(dx),
    dy === 0 ? 1 : BOX_HEIGHT / 2 / Math.abs(dy),
    1,
  );
  return { x: middle.x + dx * share, y: middle.y + dy * share };
}

function clamp(value: number, low: number, high: number): number {
  return low > high ? (low + high) / 2 : Math.min(high, Math.max(low, value));
}

/** Width of 12 px text in the weight of the boxes: figures of the typeface are 0.6 em wide, capitals about 0.65. */
export function textWidth(text: string): number {
  let width = 0;
  for (const character of text) {
    if (/[A-Z]/.test(character)) width += 8;
    else if (/[0-9\u2212\u2013+]/.test(character)) width += 7.2;
    else width += /[ .,°il\u00a0]/.test(character) ? 4 : 6.8;
  }
  return width;
}
