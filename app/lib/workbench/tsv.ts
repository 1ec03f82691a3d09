/**
 * Rows as tab-separated text for the clipboard: a spreadsheet takes it as cells, numbers as numbers.
 * Raw values, not the rounded ones of the page; absent is empty.
 *
 * A cell that a spreadsheet could take for a formula gets an apostrophe in front; tabs and line ends become spaces.
 */
export function toTsv(
  header: readonly string[],
  rows: readonly (readonly (string | number | null)[])[],
): string {
  const line = (cells: readonly (string | number | null)[]) => cells.map((c) => cell(c)).join("\t");
  return `${[line(header), ...rows.map(line)].join("\n")}\n`;
}

/** The same as comma-separated text after RFC 4180, for a figure's data. */
export function toCsv(
  header: readonly string[],
  rows: readonly (readonly (string | number | null)[])[],
): string {
  const quote = (text: string) => (/[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text);
  const line = (cells: readonly (string | number | null)[]) => cells.map((c) => quote(cell(c))).join(",");
  return `${[line(header), ...rows.map(line)].join("\r\n")}\r\n`;
}

function cell(value: string | number | null): string {
  if (value === null) return "";
  if (typeof value === "number") return Number.isFinite(value) ? String(value) : "";
  const flat = value.replace(/[\t\r\n]+/g, " ");
  return /^[=+\-@]/.test(flat) ? `'${flat}` : flat;
}
