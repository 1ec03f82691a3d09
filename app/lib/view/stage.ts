import {
  type Camera,
  IDENTITY,
  inverse,
  type Quaternion,
  rotate,
  type Vector,
  widestFace,
} from "./camera.ts";
import type { Figure, Scene } from "./scene.ts";

/** A place of the picture in pixels. */
export interface Cell {
  x: number;
  y: number;
  width: number;
  height: number;
}

/** Where and how large a scene is drawn: one cell for all conformers, or one each when they stand side by side. */
export interface Stage {
  width: number;
  height: number;
  cells: Cell[];
  /** Point in model space that lies in the middle of each cell and about which the figure turns. */
  centre: Vector;
  /** Farthest shown atom from the centre, Å: half the range that fog and depth have to cover. */
  reach: number;
  /** Pixels per Å at zoom 1. */
  scale: number;
}

export interface Point {
  x: number;
  y: number;
  /** Å above the centre, towards the reader. */
  z: number;
}

/** Room for the line on top and the scale bar below, px. */
const INSET = { top: 44, bottom: 40, side: 14 } as const;
/** Small boxes give less of it away. */
const SHALLOW = 260;
const SHALLOW_INSET = { top: 36, bottom: 34, side: 10 } as const;
const BARE_INSET = { top: 6, bottom: 6, side: 6 } as const;
/** Å around the outermost atoms: half a stick, a ring, an atom number. */
const PADDING = 0.5;
/** Share of the shorter side that one Å may take: two atoms alone would otherwise fill the box. */
const MOST_SCALE = 0.15;

/**
 * Rotation in which a view opens: the widest face of its anchor, over which everything is laid, so that the picture
 * does not turn when populations or the selection change.
 */
export function homeRotation(
  elements: readonly number[],
  bonds: readonly number[],
  anchor: ArrayLike<number> | null,
): Quaternion {
  if (!anchor) return IDENTITY;
  const all = [...elements.keys()];
  const heavy = all.filter((atom) => elements[atom]! > 1);
  const atoms = heavy.length >= 3 ? heavy : all;
  const points = atoms.flatMap((atom) => [anchor[3 * atom]!, anchor[3 * atom + 1]!, anchor[3 * atom + 2]!]);
  const order = new Map(atoms.map((atom, k) => [atom, k]));
  const between: number[] = [];
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const [a, b] = [order.get(bonds[k]!), order.get(bonds[k + 1]!)];
    if (a !== undefined && b !== undefined) between.push(a, b);
  }
  return widestFace(points, between, (k) => ![1, 6].includes(elements[atoms[k]!]!));
}

/**
 * Lays out a scene in a box: cells, centre and scale such that every shown atom lies inside in the rotation `home`.
 *
 * @param width, height CSS pixels
 * @param frame "bare" keeps no room for a caption and a scale bar
 */
export function stageOf(
  scene: Scene,
  home: Quaternion,
  width: number,
  height: number,
  frame: "framed" | "bare" = "framed",
): Stage {
  const figures = [...scene.strong, ...scene.faint];
  const box = extent(figures, scene.shown, home);
  const inset = frame === "bare" ? BARE_INSET : height < SHALLOW ? SHALLOW_INSET : INSET;
  const area: Cell = {
    x: inset.side,
    y: inset.top,
    width: Math.max(1, width - 2 * inset.side),
    height: Math.max(1, height - inset.top - inset.bottom),
  };
  const across = box.high.map((high, i) => high - box.low[i]! + 2 * PADDING) as unknown as Vector;
  const most = MOST_SCALE * Math.min(width, height);
  const grid = bestGrid(scene.mode === "side" ? scene.strong.length : 1, area, across, most);
  const middle: Vector = [
    (box.low[0] + box.high[0]) / 2,
    (box.low[1] + box.high[1]) / 2,
    (box.low[2] + box.high[2]) / 2,
  ];
  const centre = rotate(inverse(home), middle);
  let reach = 1;
  for (const { positions } of figures) {
    for (const atom of scene.shown) {
      reach = Math.max(
        reach,
        Math.hypot(
          positions[3 * atom]! - centre[0],
          positions[3 * atom + 1]! - centre[1],
          positions[3 * atom + 2]! - centre[2],
        ),
      );
    }
  }
  return { width, height, cells: grid.cells, centre, reach, scale: grid.scale };
}

/** The cell a figure stands in: its own when side by side, else the only one. */
export function cellOf(stage: Stage, place: number): Cell {
  return stage.cells[Math.min(place, stage.cells.length - 1)]!;
}

/**
 * Places atoms of a figure on the picture.
 *
 * @returns pixels from the top left corner of the box, and the height above the centre
 */
export function projector(
  stage: Stage,
  camera: Camera,
  cell: Cell,
): (positions: ArrayLike<number>, atom: number) => Point {
  const scale = stage.scale * camera.zoom;
  const x0 = cell.x + cell.width / 2 + camera.shift[0];
  const y0 = cell.y + cell.height / 2 + camera.shift[1];
  const [cx, cy, cz] = stage.centre;
  return (positions, atom) => {
    const [x, y, z] = rotate(camera.rotation, [
      positions[3 * atom]! - cx,
      positions[3 * atom + 1]! - cy,
      positions[3 * atom + 2]! - cz,
    ]);
    return { x: x0 + x * scale, y: y0 - y * scale, z };
  };
}

/** The atom of the figures in atom colours that lies under a point, the nearest first, of equal ones the upper; or null. */
export function atomAt(
  scene: Scene,
  stage: Stage,
  camera: Camera,
  x: number,
  y: number,
  tolerance: number,
): { atom: number; figure: Figure } | null {
  let best: { atom: number; figure: Figure; cost: number } | null = null;
  scene.strong.forEach((figure, place) => {
    const project = projector(stage, camera, cellOf(stage, place));
    for (const atom of scene.shown) {
      const point = project(figure.positions, atom);
      const distance = Math.hypot(point.x - x, point.y - y);
      if (distance > tolerance) continue;
      // One pixel nearer weighs as much as a third of an Å higher: what lies on top is what the reader sees.
      const cost = distance - 3 * point.z;
      if (!best || cost < best.cost) best = { atom, figure, cost };
    }
  });
  return best;
}

interface Extent {
  low: [number, number, number];
  high: [number, number, number];
}

function extent(figures: readonly Figure[], shown: Int32Array, rotation: Quaternion): Extent {
  const low: Extent["low"] = [Infinity, Infinity, Infinity];
  const high: Extent["high"] = [-Infinity, -Infinity, -Infinity];
  for (const { positions } of figures) {
    for (const atom of shown) {
      const point = rotate(rotation, [
        positions[3 * atom]!,
        positions[3 * atom + 1]!,
        positions[3 * atom + 2]!,
      ]);
      for (let i = 0; i < 3; i++) {
        low[i] = Math.min(low[i]!, point[i]!);
        high[i] = Math.max(high[i]!, point[i]!);
      }
    }
  }
  return Number.isFinite(low[0]) ? { low, high } : { low: [0, 0, 0], high: [0, 0, 0] };
}

/** The grid that lets figures of one size be drawn largest. */
function bestGrid(
  count: number,
  area: Cell,
  across: Vector,
  mostScale: number,
): { cells: Cell[]; scale: number } {
  let best: { columns: number; rows: number; scale: number } | null = null;
  for (let columns = 1; columns <= Math.max(1, count); columns++) {
    const rows = Math.ceil(Math.max(1, count) / columns);
    const label = count > 1 ? 16 : 0;
    const scale = Math.min(
      area.width / columns / across[0],
      Math.max(1, area.height / rows - label) / across[1],
      mostScale,
    );
    if (!best || scale > best.scale * 1.001) best = { columns, rows, scale };
  }
  const { columns, rows, scale } = best!;
  const [width, height] = [area.width / columns, area.height / rows];
  const cells = Array.from({ length: Math.max(1, count) }, (_, k) => ({
    x: area.x + (k % columns) * width,
    y: area.y + Math.floor(k / columns) * height,
    width,
    height,
  }));
  return { cells, scale };
}
