/** One row of the table of figures. */
export interface Row {
  name: string;
  /** What it was measured on. */
  on: string;
  unit: string;
  /** Null where the row only informs. */
  must: number | null;
  aim: number | null;
  now: number;
  /** True where more is better. */
  rising?: boolean;
  /** How many times faster (or smaller) than the yardstick in the same run; estimated from a sample where said so. */
  ratio: number | null;
  note?: string;
}

const meets = (row: Row, limit: number) => (row.rising ? row.now >= limit : row.now <= limit);

/** Whether each limit holds: "aim", "must", "no", or "-" where there is none. */
export function verdict(row: Row): string {
  if (row.must === null) return "-";
  if (row.aim !== null && meets(row, row.aim)) return "aim";
  return meets(row, row.must) ? "must" : "NO";
}

/** Three digits, as short as that goes. */
function digits(value: number): string {
  if (value !== 0 && Math.abs(value) < 1e-3) return value.toExponential(0);
  return value >= 100 ? value.toFixed(0) : String(Number(value.toPrecision(3)));
}

/** Plain text, columns in line. */
export function tableOf(rows: readonly Row[]): string {
  const head = ["row", "measured on", "must", "aim", "now", "met", "yardstick", "note"];
  const lines = rows.map((row) => [
    row.name,
    row.on,
    row.must === null ? "" : `${digits(row.must)} ${row.unit}`,
    row.aim === null ? "" : `${digits(row.aim)} ${row.unit}`,
    `${digits(row.now)} ${row.unit}`,
    verdict(row),
    row.ratio === null ? "" : `${row.ratio >= 1e4 ? row.ratio.toExponential(0) : digits(row.ratio)} x`,
    row.note ?? "",
  ]);
  const widths = head.map((title, c) => Math.max(title.length, ...lines.map((line) => line[c]!.length)));
  const show = (line: string[]) =>
    line
      .map((cell, c) => cell.padEnd(widths[c]!))
      .join("  ")
      .trimEnd();
  return [show(head), show(widths.map((width) => "-".repeat(width))), ...lines.map(show)].join("\n");
}
