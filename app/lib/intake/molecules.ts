import { hillFormula } from "../chem/formula.ts";
import { graphSignature } from "../chem/signature.ts";
import { describeChange } from "./bond-changes.ts";
import type { BondKind } from "./frame-kinds.ts";
import type { FrameRecord } from "./frame-record.ts";
import type { MoleculeChoice } from "./reading-questions.ts";

/** So many molecules are told apart; more of them are no choice. */
const MOST_MOLECULES = 200;

/**
 * A key of each frame's molecule: composition, bonds and charge, whatever the order of its atoms. A charge that is left
 * out is unknown and agrees with the one that most frames of the same bonds state.
 *
 * @param records frames with bonds
 * @example moleculeKeys(records)(records[0]!) === moleculeKeys(records)(records[1]!)
 */
export function moleculeKeys(records: readonly FrameRecord[]): (record: FrameRecord) => string {
  const signatures = new Map<BondKind, string>();
  const bonded = ({ shape, kind }: FrameRecord): string => {
    if (!kind) return "";
    const known = signatures.get(kind) ?? `${shape.composition} ${graphSignature(kind.graph)}`;
    signatures.set(kind, known);
    return known;
  };
  const charges = new Map<string, Map<number, number>>();
  for (const record of records) {
    if (record.charge === null) continue;
    const key = bonded(record);
    const counts = charges.get(key) ?? new Map<number, number>();
    charges.set(key, counts.set(record.charge, (counts.get(record.charge) ?? 0) + 1));
  }
  const usual = new Map(
    [...charges].map(([key, counts]) => [key, [...counts].reduce((a, b) => (b[1] > a[1] ? b : a))[0]]),
  );
  return (record) => {
    const key = bonded(record);
    return `${key} ${record.charge ?? usual.get(key) ?? ""}`;
  };
}

interface Found {
  record: FrameRecord;
  frames: number;
  charge: number | null;
}

/**
 * The molecules that frames show, the one with most frames first; of equal ones that met first. Those of one formula and
 * charge say in what they differ.
 *
 * @param keyOf as `moleculeKeys` gives it
 * @returns none where all frames are of one, or of more than can be a choice
 */
export function moleculesOf(
  records: readonly FrameRecord[],
  keyOf: (record: FrameRecord) => string,
): MoleculeChoice[] {
  const kinds = new Set(records.map(({ kind }) => kind));
  if (kinds.size < 2 && records.every(({ charge }) => charge === records[0]?.charge)) return [];
  if (kinds.size > MOST_MOLECULES) return [];
  const found = new Map<string, Found>();
  for (const record of records) {
    const key = keyOf(record);
    const known = found.get(key);
    if (known) {
      known.frames += 1;
      known.charge ??= record.charge;
    } else found.set(key, { record, frames: 1, charge: record.charge });
  }
  const sorted = [...found.values()].sort((a, b) => b.frames - a.frames);
  return sorted.map((one, k) => ({
    frame: one.record.frame,
    frames: one.frames,
    formula: nameOf(one),
    charge: one.charge,
    difference: differenceIn(one, sorted),
    proposed: k === 0,
  }));
}

const nameOf = ({ record }: Found) => formulaWithDummies(record.shape.elements, record.shape.isotopes);

/** Against the first of the same name; null where the name alone tells it apart. */
function differenceIn(one: Found, all: readonly Found[]): string | null {
  const same = all.filter(
    (other) => nameOf(other) === nameOf(one) && (other.charge ?? 0) === (one.charge ?? 0),
  );
  const [first] = same;
  if (first === undefined || same.length < 2) return null;
  const frame = first.record.frame;
  if (first === one) return `bonds as in frame ${frame}`;
  const [a, b] = [first.record.kind?.graph, one.record.kind?.graph];
  const inOrder =
    a && b && a.elements.length === b.elements.length && a.elements.every((z, k) => z === b.elements[k]);
  const words = inOrder ? describeChange(a, b).words : "";
  if (words !== "") return `against frame ${frame}, ${words}`;
  return `other bonds than in frame ${frame}, as in frame ${one.record.frame}`;
}

/** Hill formula; dummy atoms are named behind it. */
export function formulaWithDummies(elements: ArrayLike<number>, isotopes: ArrayLike<number>): string {
  const dummies = Array.from(elements).filter((z) => z === 0).length;
  const formula = hillFormula(elements, isotopes);
  return dummies === 0 ? formula : `${formula} with ${dummies} dummy ${dummies > 1 ? "atoms" : "atom"}`;
}
