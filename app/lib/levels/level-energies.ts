import { type ColumnData, packColumn, unpackColumn } from "../column-data.ts";
import { weigh } from "../thermo/boltzmann.ts";
import { lowestPlace } from "./align.ts";

/** Energies of one level over the frames of an ensemble, as a loader hands them to the page. */
export interface LevelEnergiesView {
  id: string;
  /** Base64 of a packed column: kcal/mol above the lowest accepted frame; held frames and missing values absent. */
  packed: string;
}

/** Who takes part in a comparison: a conformer of the distinct set, or an accepted frame. */
export interface Member {
  frame: number;
  /** "c4" or "frame 12". */
  name: string;
  /** Copies that it stands for. */
  weight: number;
}

export interface PairedLevels {
  /** Those with both energies. */
  members: Member[];
  /** kcal/mol, any zero; same order as `members`. */
  level: Float64Array;
  reference: Float64Array;
  weights: Float64Array;
  /** Members without an energy at the level, at the reference, and at either of them. */
  missingLevel: number;
  missingReference: number;
  left: Member[];
}

/** Puts a level's energies into the form that travels. */
export function packEnergies(id: string, column: ColumnData): LevelEnergiesView {
  const bytes = packColumn(column);
  let text = "";
  for (let at = 0; at < bytes.length; at += 8192)
    text += String.fromCharCode(...bytes.subarray(at, at + 8192));
  return { id, packed: btoa(text) };
}

/**
 * Reads what `packEnergies` wrote.
 *
 * @throws RangeError where the text does not belong to so many frames
 */
export function unpackEnergies(view: LevelEnergiesView, frames: number): ColumnData {
  return unpackColumn(
    Uint8Array.from(atob(view.packed), (letter) => letter.charCodeAt(0)),
    frames,
  );
}

/**
 * The members that have an energy at both levels.
 *
 * @param level, reference by frame, as `unpackEnergies` gives them
 * @example pairLevels(members, uff, mmff94).left.length // 0 where nothing is missing
 */
export function pairLevels(
  members: readonly Member[],
  level: ColumnData,
  reference: ColumnData,
): PairedLevels {
  const both: Member[] = [];
  const left: Member[] = [];
  let missingLevel = 0;
  let missingReference = 0;
  for (const member of members) {
    const atLevel = level.present[member.frame - 1] === 1;
    const atReference = reference.present[member.frame - 1] === 1;
    if (!atLevel) missingLevel++;
    if (!atReference) missingReference++;
    (atLevel && atReference ? both : left).push(member);
  }
  return {
    members: both,
    level: Float64Array.from(both, ({ frame }) => level.values[frame - 1]!),
    reference: Float64Array.from(both, ({ frame }) => reference.values[frame - 1]!),
    weights: Float64Array.from(both, ({ weight }) => weight),
    missingLevel,
    missingReference,
    left,
  };
}

/** How much of the reference the comparison is about. */
export interface CoveredReference {
  /** Share of the reference population whose conformers have an energy at the level too, fraction. */
  covered: number;
  /** The reference's own lowest with its share, where it has no energy at the level; else null. */
  lowest: { name: string; share: number } | null;
}

/**
 * What the level leaves out of the reference: a comparison of those with both energies says nothing of the others, and
 * they may be the most populated.
 *
 * @param level, reference by frame, as `unpackEnergies` gives them
 * @example coveredReference(members, part, cheap, 298.15) // { covered: 0.47, lowest: { name: "c1", share: 0.53 } }
 */
export function coveredReference(
  members: readonly Member[],
  level: ColumnData,
  reference: ColumnData,
  temperatureK: number,
): CoveredReference {
  const known = members.filter(({ frame }) => reference.present[frame - 1] === 1);
  if (known.length === 0) return { covered: 0, lowest: null };
  const energies = Float64Array.from(known, ({ frame }) => reference.values[frame - 1]!);
  const weights = Float64Array.from(known, ({ weight }) => weight);
  const { populations } = weigh(energies, weights, temperatureK);
  const has = ({ frame }: Member) => level.present[frame - 1] === 1;
  const left = known.reduce((sum, member, k) => (has(member) ? sum : sum + populations[k]!), 0);
  const place = lowestPlace(energies);
  const first = known[place]!;
  return {
    covered: Math.max(0, 1 - left),
    lowest: has(first) ? null : { name: first.name, share: populations[place]! },
  };
}
