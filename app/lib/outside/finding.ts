import { capital, countWord, fixed, formatEnergy, formatPercent, plural, withUnit } from "../format.ts";

/** A conformer as it lies to an outside structure. */
export interface OutsideRow {
  /** Position in the distinct set. */
  index: number;
  name: string;
  frame: number;
  /** Å, the smaller of what counts. */
  rmsd: number;
  mirror: boolean;
  /** Å of the other hand. */
  otherHand: number;
  exact: boolean;
  relativeEnergy: number | null;
  population: number | null;
}

/** Conformers from the nearest on; equal ones in the order of the set. */
export function nearestRows(
  rows: readonly {
    index: number;
    name: string;
    frame: number;
    relativeEnergy: number | null;
    population: number | null;
  }[],
  found: { rmsd: ArrayLike<number>; mirrorRmsd: ArrayLike<number>; exact: ArrayLike<number> },
  countMirror: boolean,
): OutsideRow[] {
  const near = rows.flatMap(({ index, name, frame, relativeEnergy, population }): OutsideRow[] => {
    const [same, other] = [found.rmsd[index], found.mirrorRmsd[index]];
    if (same === undefined || other === undefined) return [];
    const mirror = countMirror && other < same;
    return [
      {
        index,
        name,
        frame,
        rmsd: mirror ? other : same,
        mirror,
        otherHand: mirror ? same : other,
        exact: found.exact[index] === 1,
        relativeEnergy,
        population,
      },
    ];
  });
  return near.sort((a, b) => a.rmsd - b.rmsd || a.index - b.index);
}

const AGREES_DEGREES = 15;

/** How far a torsion of the structure is from that of the nearest conformer, degrees; null where it has none. */
interface Apart {
  apart: number | null;
}

/**
 * What the page says first of an outside structure.
 *
 * @param strain kcal/mol above the lowest conformer at the level of the relative energies; null where it carries none
 */
export function outsideFinding(
  name: string,
  rows: readonly OutsideRow[],
  options: {
    strain: number | null;
    near: number;
    torsions: readonly Apart[];
    labels: readonly string[];
    /** Kept beside the nearest as its mirror image, so that the population of the nearest is that of one hand. */
    otherHand?: { name: string; population: number | null } | null;
  },
): { text: string; second: string } | null {
  const nearest = rows[0];
  if (!nearest) return null;
  const energy =
    nearest.relativeEnergy === null
      ? null
      : nearest.relativeEnergy === 0
        ? "the lowest of all"
        : `${withUnit(formatEnergy(nearest.relativeEnergy), "kcal/mol")} above the lowest`;
  const shape =
    nearest.population === null
      ? energy === null
        ? ""
        : ` That shape lies ${energy}`
      : ` The flask holds ${shareOf(nearest.population)} of that shape, ${energy}`;
  const above =
    options.strain === null || nearest.relativeEnergy === null
      ? null
      : options.strain - nearest.relativeEnergy;
  const strain =
    above === null
      ? "."
      : above >= 0
        ? `; the structure itself is strained by ${formatEnergy(above)} more.`
        : `; the structure itself lies ${formatEnergy(-above)} below it.`;
  const hand = nearest.mirror ? ", as its mirror image" : "";
  const text = `${name} is nearest to ${nearest.name}, ${withUnit(fixed(nearest.rmsd, 2), "Å")} away${hand}.${shape}${shape === "" ? "" : strain}`;
  const hands = nearest.population === null ? "" : handWords(options.otherHand ?? null);
  const second = [hands, torsionWords(options), nearWords(rows, options.near)].filter(Boolean).join(" ");
  return { text, second };
}

function handWords(other: { name: string; population: number | null } | null): string {
  if (other === null) return "";
  const share = other.population === null ? "" : `, with ${shareOf(other.population)} of its own`;
  return `That counts one hand only: ${other.name} is its mirror image and is kept apart${share}.`;
}

function shareOf(population: number): string {
  return population < 0.005 ? "less than 1\u00a0%" : formatPercent(population);
}

function nearWords(rows: readonly OutsideRow[], near: number): string {
  const within = rows.filter((row) => row.rmsd <= near).length;
  const at = withUnit(fixed(near, 2), "Å");
  if (within === 0) return `No conformer lies within ${at}.`;
  return `${capital(countWord(within))} ${within === 1 ? "conformer lies" : "conformers lie"} within ${at}.`;
}

function torsionWords({
  torsions,
  labels,
}: {
  torsions: readonly Apart[];
  labels: readonly string[];
}): string {
  const known = torsions.flatMap(({ apart }, k) =>
    apart === null ? [] : [{ apart, label: labels[k] ?? "" }],
  );
  if (known.length === 0) return "";
  const agree = known.filter(({ apart }) => apart <= AGREES_DEGREES);
  const worst = known.reduce((far, one) => (one.apart > far.apart ? one : far));
  const words = `within ${AGREES_DEGREES}°`;
  if (agree.length === known.length)
    return known.length === 1
      ? `Its one torsion agrees ${words}.`
      : `All ${known.length} torsions agree ${words}.`;
  const first =
    agree.length === 0
      ? `None of ${plural(known.length, "torsion")} agrees ${words}`
      : `${capital(countWord(agree.length))} of ${known.length} torsions ${agree.length === 1 ? "agrees" : "agree"} ${words}`;
  return `${first}; ${worst.label} is turned by ${fixed(worst.apart, 0)}°.`;
}
