/** A point that wants its name beside it, in pixels. */
export interface NamedPoint {
  name: string;
  x: number;
  y: number;
}

export interface PlacedName {
  text: string;
  /** Where the text begins, or ends where `end`; its base line. */
  x: number;
  y: number;
  end: boolean;
}

interface Box {
  left: number;
  right: number;
  top: number;
  bottom: number;
}

/** Points nearer than this share one name: "c3, c4". */
const TOGETHER_PX = 12;
const LETTER_PX = 7;
const HEIGHT_PX = 12;
const POINT_PX = 6;

/**
 * Places names beside their points so that none lies on another name or on a named point. Points that lie on one
 * another share a name; one that finds no free place stays without, and is read by pointer or key.
 *
 * @param points in order of importance: the first ones choose first
 * @param area what names must stay inside of, px
 * @example placeNames([{ name: "c3", x: 50, y: 50 }, { name: "c4", x: 53, y: 52 }], area)[0].text // "c3, c4"
 */
export function placeNames(points: readonly NamedPoint[], area: Box): PlacedName[] {
  const groups: NamedPoint[][] = [];
  for (const point of points) {
    const near = groups.find((group) =>
      group.some((one) => Math.hypot(one.x - point.x, one.y - point.y) < TOGETHER_PX),
    );
    if (near) near.push(point);
    else groups.push([point]);
  }
  const taken: Box[] = points.map(({ x, y }) => ({
    left: x - POINT_PX,
    right: x + POINT_PX,
    top: y - POINT_PX,
    bottom: y + POINT_PX,
  }));
  const placed: PlacedName[] = [];
  for (const group of groups) {
    const text = group.map((point) => point.name).join(", ");
    const found = placesBeside(group, text).find(
      ({ box }) => inside(box, area) && taken.every((other) => apart(box, other)),
    );
    if (!found) continue;
    taken.push(found.box);
    placed.push(found.name);
  }
  return placed;
}

/** Right above, right, right below, then the same at the left of the points. */
function placesBeside(group: readonly NamedPoint[], text: string): { name: PlacedName; box: Box }[] {
  const width = text.length * LETTER_PX;
  const left = Math.min(...group.map((point) => point.x)) - POINT_PX - 2;
  const right = Math.max(...group.map((point) => point.x)) + POINT_PX + 2;
  const top = Math.min(...group.map((point) => point.y));
  const bottom = Math.max(...group.map((point) => point.y));
  const lines = [top - 5, (top + bottom) / 2 + 4, bottom + 14];
  return [false, true].flatMap((end) =>
    lines.map((y) => {
      const x = end ? left : right;
      const from = end ? x - width : x;
      return {
        name: { text, x, y, end },
        box: { left: from, right: from + width, top: y - HEIGHT_PX + 2, bottom: y + 2 },
      };
    }),
  );
}

function inside(box: Box, area: Box): boolean {
  return box.left >= area.left && box.right <= area.right && box.top >= area.top && box.bottom <= area.bottom;
}

function apart(a: Box, b: Box): boolean {
  return a.right <= b.left || b.right <= a.left || a.bottom <= b.top || b.bottom <= a.top;
}
