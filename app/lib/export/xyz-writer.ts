import { symbolOf } from "../chem/elements.ts";
import { type ExportConformer, type ExportSet, sourceOf } from "./export-set.ts";

/**
 * The distinct set as extended XYZ, one string a conformer: coordinates and energies to the last digit, so that reading
 * the file gives the same doubles and labels. Relative energies are kcal/mol, said in their key; `frame` is the number
 * in the ensemble, `source_frame` that in its file.
 *
 * @param positionsOf Å, [x, y, z] an atom, of the conformer with this frame number
 * @throws RangeError where the coordinates of a conformer do not fit the atoms
 * @example for (const text of writeXyz(set, (frame) => positions.get(frame)!)) send(text);
 */
export function* writeXyz(
  set: ExportSet,
  positionsOf: (frame: number) => ArrayLike<number>,
): Generator<string> {
  const names = speciesNames(set);
  const labels = set.atomLabels?.some((label) => label !== null) ? set.atomLabels : null;
  for (const conformer of set.conformers) {
    const positions = positionsOf(conformer.frame);
    if (positions.length !== 3 * names.length) {
      throw new RangeError(
        `Frame ${conformer.frame} has ${positions.length / 3} atoms, expected ${names.length}.`,
      );
    }
    const lines = [String(names.length), commentLine(set, conformer, labels !== null)];
    names.forEach((name, k) => {
      const axes = [0, 1, 2].map((axis) => exactNumber(positions[3 * k + axis] ?? 0).padStart(22));
      const label = labels === null ? "" : ` ${labelToken(labels[k]) ?? name}`;
      lines.push(`${name.padEnd(3)}${axes.join(" ")}${label}`);
    });
    yield `${lines.join("\n")}\n`;
  }
}

/** Symbols; `D`, `T` and `13C` for isotopes, `X` for dummies. */
function speciesNames(set: ExportSet): string[] {
  return Array.from(set.elements, (z, k) => {
    const mass = set.isotopes?.[k] ?? 0;
    if (mass === 0) return symbolOf(z);
    if (z === 1 && mass > 1) return mass === 2 ? "D" : "T";
    return `${mass}${symbolOf(z)}`;
  });
}

function commentLine(set: ExportSet, conformer: ExportConformer, withLabels: boolean): string {
  const source = sourceOf(set.sources, conformer.frame);
  const energy = set.level === null ? null : conformer.energy;
  const entries: [string, string | number | null][] = [
    ["name", conformer.label],
    ["energy", energy],
    ["energy_unit", energy === null ? null : (set.level?.unit ?? null)],
    ["level", energy === null ? null : (set.level?.name ?? null)],
    ["relative_kcal_mol", conformer.relativeEnergy],
    ["population", conformer.population],
    ["temperature_K", conformer.population === null ? null : set.temperature],
    ["degeneracy", conformer.degeneracy],
    ["symmetry_number", conformer.symmetryNumber],
    ["copies", conformer.copies],
    ["found", conformer.found],
    ["frame", conformer.frame],
    ["source_frame", source && conformer.frame - source.firstFrame + 1],
    ["source_sha256", source?.sha256 ?? null],
    ["not_current", set.notCurrent ?? null],
  ];
  const properties = `Properties=species:S:1:pos:R:3${withLabels ? ":label:S:1" : ""}`;
  const written = entries
    .filter(([, value]) => value !== null)
    .map(([key, value]) => `${key}=${valueText(value)}`);
  return [properties, ...written].join(" ");
}

function valueText(value: string | number | null): string {
  return typeof value === "number" ? exactNumber(value) : quoted(value ?? "");
}

/** In quotes, with what the format can escape escaped; characters that would end the line become blanks. */
function quoted(text: string): string {
  const safe = text.replace(/[\r\0\u0085\u2028\u2029]/g, " ");
  return `"${safe.replaceAll("\\", "\\\\").replaceAll('"', '\\"').replaceAll("\n", "\\n")}"`;
}

/** One word, or nothing. */
function labelToken(label: string | null | undefined): string | null {
  const token = label?.replace(/\s+/g, "_");
  return token ? token : null;
}

/** The shortest text that reads back as the same double. */
export function exactNumber(value: number): string {
  return Object.is(value, -0) ? "-0" : String(value);
}
