import type { ExportSet } from "./export-set.ts";
import { exactNumber } from "./xyz-writer.ts";

/** RFC 4180: comma, CRLF, quotes doubled inside of quotes. */
const LINE_END = "\r\n";

/** Text that a spreadsheet would run, or that looks as if guarded already (so that the guard can be taken off again). */
const RISKY = /^'*[=+\-@\t\r\n\0]/;
const GUARDED = /^'+[=+\-@\t\r\n\0]/;

/**
 * A cell of text: a leading `'` before what a spreadsheet could run as a formula, quotes where the format needs them.
 *
 * @example textCell("=1+1") // "'=1+1"
 * @example textCell('a "b", c') // '"a ""b"", c"'
 */
export function textCell(text: string): string {
  const guarded = RISKY.test(text) ? `'${text}` : text;
  return /[",;\r\n\t]/.test(guarded) ? `"${guarded.replaceAll('"', '""')}"` : guarded;
}

/**
 * Takes the guard of `textCell` off again, when a table is read (row C13).
 *
 * @example unguardText("'=1+1") // "=1+1"
 */
export function unguardText(text: string): string {
  return GUARDED.test(text) ? text.slice(1) : text;
}

/** A number bare and to full precision, empty where there is none. */
export function numberCell(value: number | null): string {
  return value === null || !Number.isFinite(value) ? "" : exactNumber(value);
}

/** A quantity over the conformers, in their order. */
export interface CsvColumn {
  readonly name: string;
  readonly unit: string | null;
  readonly values: readonly (number | null)[];
}

/** Fixed columns of `export.csv`; energies in kcal/mol, the population as a fraction. */
const FIXED = [
  "frame",
  "label",
  "relativeEnergy",
  "degeneracy",
  "symmetryNumber",
  "copies",
  "found",
  "population",
];

/** Names of which no two are equal: a column named as one before it gets a number behind, as spreadsheets do. */
function distinctNames(names: readonly string[]): string[] {
  const taken = new Set(names);
  const seen = new Set<string>();
  return names.map((name) => {
    let own = name;
    for (let k = 2; seen.has(own) || (own !== name && taken.has(own)); k++) own = `${name} (${k})`;
    seen.add(own);
    return own;
  });
}

/** Which search found a conformer how often: "batch 1: 3; batch 2: 1". */
function foundInCell({ foundIn }: ExportSet["conformers"][number]): string {
  return textCell(foundIn?.map(({ batch, found }) => `batch ${batch}: ${found}`).join("; ") ?? "");
}

/**
 * The distinct set as CSV, one line a string: the fixed columns, then one a quantity with its unit in the header, then
 * `foundIn` where the frames came from several searches.
 *
 * @throws RangeError on a column of another length
 * @example [...writeCsv(set, [{ name: "Rg", unit: "Å", values: [3.1, 3.4] }])][0]
 * // frame,label,relativeEnergy,degeneracy,symmetryNumber,copies,found,population,Rg [Å]
 */
export function* writeCsv(
  set: Pick<ExportSet, "conformers">,
  columns: readonly CsvColumn[],
): Generator<string> {
  for (const { name, values } of columns) {
    if (values.length !== set.conformers.length) {
      throw new RangeError(`“${name}” has ${values.length} values for ${set.conformers.length} conformers.`);
    }
  }
  const headers = columns.map(({ name, unit }) => (unit === null ? name : `${name} [${unit}]`));
  const several = set.conformers.some(({ foundIn }) => foundIn !== undefined);
  yield distinctNames([...FIXED, ...headers, ...(several ? ["foundIn"] : [])])
    .map(textCell)
    .join(",") + LINE_END;
  for (const [k, conformer] of set.conformers.entries()) {
    const cells = [
      numberCell(conformer.frame),
      textCell(conformer.label ?? ""),
      numberCell(conformer.relativeEnergy),
      numberCell(conformer.degeneracy),
      numberCell(conformer.symmetryNumber),
      numberCell(conformer.copies),
      numberCell(conformer.found),
      numberCell(conformer.population),
      ...columns.map(({ values }) => numberCell(values[k] ?? null)),
      ...(several ? [foundInCell(conformer)] : []),
    ];
    yield cells.join(",") + LINE_END;
  }
}
