import { EXACT_FIELD } from "../sdf/exact-coordinates.ts";
import type { BondOrders } from "../sdf/orders.ts";
import type { EnergyUnit } from "../units.ts";
import type { CsvColumn } from "./csv.ts";
import { type ExportConformer, type ExportSet, mappingText, sourceOf } from "./export-set.ts";
import { molBlockWriter, oneLine } from "./mol-block.ts";
import { exactNumber } from "./xyz-writer.ts";

/** The bonded graph of the ensemble with its orders, as `bondOrders` gives them. */
export interface SdfBonds {
  /** Pairs i < j, sorted, flat. */
  readonly bonds: ArrayLike<number>;
  readonly orders: BondOrders;
}

/** Units as tags carry them; intake knows each again. */
const UNIT_TAGS: Record<EnergyUnit, string> = {
  hartree: "HARTREE",
  "kcal/mol": "KCAL_MOL",
  "kJ/mol": "KJ_MOL",
  eV: "EV",
  meV: "meV",
  "cm-1": "CM-1",
  K: "KELVIN",
};

const ORDER_WORDS: Record<BondOrders["origin"], string> = {
  file: "from the file",
  perceived: "perceived by valence",
  unknown: "not known, written as single",
};

/**
 * The distinct set as SDF, one string a conformer: V2000 to 999 atoms, else V3000, title = label, then data fields with
 * their units in the tags. Coordinates that four decimals do not hold go along in a field of their own, from which our
 * reader takes them, so that reading the file gives the same doubles.
 *
 * @param positionsOf Å, [x, y, z] an atom, of the conformer with this frame number
 * @param columns further quantities, in the order of the conformers
 * @throws RangeError where coordinates or values do not fit
 * @example for (const text of writeSdf(set, { bonds, orders }, (frame) => positions.get(frame)!)) send(text);
 */
export function* writeSdf(
  set: ExportSet,
  { bonds, orders }: SdfBonds,
  positionsOf: (frame: number) => ArrayLike<number>,
  columns: readonly CsvColumn[] = [],
): Generator<string> {
  const { elements, isotopes, atomLabels: labels } = set;
  const write = molBlockWriter({ elements, isotopes, labels, bonds, orders });
  for (const { name, values } of columns) {
    if (values.length !== set.conformers.length) {
      throw new RangeError(`“${name}” has ${values.length} values for ${set.conformers.length} conformers.`);
    }
  }
  for (const [row, conformer] of set.conformers.entries()) {
    const positions = positionsOf(conformer.frame);
    const block = write(conformer.label ?? "", positions);
    const data = [...ownFields(set, conformer, orders), ...columnFields(columns, row)];
    const exact = block.exact ? "" : `> <${EXACT_FIELD}>\n${exactText(positions)}\n\n`;
    yield `${block.text}${fieldText(data)}${exact}$$$$\n`;
  }
}

type Field = [tag: string, value: string | number | null];

function ownFields(set: ExportSet, conformer: ExportConformer, orders: BondOrders): Field[] {
  const source = sourceOf(set.sources, conformer.frame);
  const level = conformer.energy === null ? null : set.level;
  return [
    [level ? `ENERGY_${UNIT_TAGS[level.unit]}` : "ENERGY", level && conformer.energy],
    ["LEVEL", level?.name ?? null],
    ["RELATIVE_KCAL_MOL", conformer.relativeEnergy],
    ["POPULATION", conformer.population],
    ["TEMPERATURE_K", conformer.population === null ? null : set.temperature],
    ["DEGENERACY", conformer.degeneracy],
    ["SYMMETRY_NUMBER", conformer.symmetryNumber],
    ["COPIES", conformer.copies],
    ["FOUND", conformer.found],
    ["FRAME", conformer.frame],
    ["SOURCE_FRAME", source && conformer.frame - source.firstFrame + 1],
    ["SOURCE_SHA256", source?.sha256 ?? null],
    ["SOURCE_ATOMS", conformer.mapping ? mappingText(conformer.mapping) : null],
    ["NOT_CURRENT", set.notCurrent ?? null],
    ["BOND_ORDERS", ORDER_WORDS[orders.origin]],
  ];
}

function columnFields(columns: readonly CsvColumn[], row: number): Field[] {
  return columns.map(({ name, unit, values }) => [
    unit === null ? name : `${name} [${unit}]`,
    values[row] ?? null,
  ]);
}

/** Fields without a value are left out; a tag that is taken gets a number. */
function fieldText(fields: readonly Field[]): string {
  const taken = new Set<string>([EXACT_FIELD]);
  let text = "";
  for (const [name, value] of fields) {
    const plain = oneLine(name).replace(/[<>]/g, "_").trim() || "unnamed";
    let tag = plain;
    for (let k = 2; taken.has(tag); k++) tag = `${plain} (${k})`;
    taken.add(tag);
    if (value !== null) text += `> <${tag}>\n${valueText(value)}\n\n`;
  }
  return text;
}

function valueText(value: string | number): string {
  if (typeof value === "number") return exactNumber(value);
  // One line that reads neither as a header nor as the end of the record.
  const line = oneLine(value);
  return /^[>$]/.test(line) ? ` ${line}` : line;
}

function exactText(positions: ArrayLike<number>): string {
  const lines: string[] = [];
  for (let k = 0; k < positions.length; k += 3) {
    lines.push([0, 1, 2].map((axis) => exactNumber(positions[k + axis]!)).join(" "));
  }
  return lines.join("\n");
}
