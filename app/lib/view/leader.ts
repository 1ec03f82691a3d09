import type { Mark, Token } from "./mark.ts";
import type { Figure, Scene } from "./scene.ts";
import type { Cell, Point, Stage } from "./stage.ts";

/** A figure in its cell, and where its atoms are on the picture. */
export interface Spot {
  scene: Scene;
  stage: Stage;
  cell: Cell;
  figure: Figure;
  at(atom: number): Point;
}

export interface BoxLook {
  stroke: Token;
  fill: Token;
  ink: Token;
}

const BOX_HEIGHT = 20;
/** Height of the line that names a cell. */
const CELL_HEAD = 18;

/** A text in a box off the molecule, joined to its place by a thin line. */
export function boxOnLeader(spot: Spot, anchor: Point, text: string, look: BoxLook): Mark[] {
  const { stroke, fill, ink } = look;
  const width = textWidth(text) + 12;
  const middle = clearPlace(spot, anchor, width);
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

/** Where a box would hide something: atoms and the middles of bonds. */
function obstacles({ scene, figure, at }: Spot): Point[] {
  const found = [...scene.shown].map((atom) => at(atom));
  for (let k = 0; k + 1 < figure.bonds.length; k += 2) {
    const [a, b] = [at(figure.bonds[k]!), at(figure.bonds[k + 1]!)];
    found.push({ x: (a.x + b.x) / 2, y: (a.y + b.y) / 2, z: 0 });
  }
  return found;
}

const DIRECTIONS = 24;
const REACHES = [40, 62, 90, 125, 165] as const;

/** The nearest place for a box that covers no atom or bond and stays inside the cell; else the one that covers least. */
function clearPlace(spot: Spot, anchor: Point, width: number): { x: number; y: number } {
  const { stage, cell } = spot;
  const taken = obstacles(spot);
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
      const hidden = taken.filter(covers).length;
      const crossed = taken.filter((p) => nearSegment(p, anchor, { x, y })).length;
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
