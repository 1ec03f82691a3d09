import { superpose } from "../align/superpose.ts";
import type { Mark } from "./mark.ts";
import type { Figure } from "./scene.ts";
import type { Point } from "./stage.ts";

/** A structure that is no conformer of the ensemble, drawn as dashed lines over the first figure. */
export interface Ghost {
  /** Packed x, y, z in Å, in the atom order of the group; hidden atoms are not read. */
  positions: Float64Array;
  /** Atoms by which it is laid over the figure. */
  atoms: Int32Array;
  /** Bonds that are drawn, flat pairs. */
  bonds: readonly number[];
}

/**
 * Marks of a ghost, laid over a figure.
 *
 * @param place puts a point of the model on the picture
 */
export function ghostMarks(
  ghost: Ghost,
  figure: Figure,
  shown: ReadonlySet<number>,
  place: (positions: ArrayLike<number>, atom: number) => Point,
): Mark[] {
  const { positions } = superpose(figure.positions, ghost.positions, { atoms: ghost.atoms });
  const lines: { mark: Mark; z: number }[] = [];
  for (let k = 0; k + 1 < ghost.bonds.length; k += 2) {
    const [i, j] = [ghost.bonds[k]!, ghost.bonds[k + 1]!];
    if (!shown.has(i) || !shown.has(j)) continue;
    const [a, b] = [place(positions, i), place(positions, j)];
    lines.push({
      mark: {
        kind: "line",
        points: [
          [a.x, a.y],
          [b.x, b.y],
        ],
        stroke: "ink",
        width: 2,
        dash: [4, 4],
      },
      z: a.z + b.z,
    });
  }
  return lines.sort((a, b) => a.z - b.z).map(({ mark }) => mark);
}
