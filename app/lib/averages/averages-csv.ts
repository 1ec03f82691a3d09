import { numberCell, textCell } from "../export/csv.ts";
import type { AverageRule } from "./rule.ts";

/** One property column, averaged. */
export interface AveragesRow {
  /** Name of the column, without its unit. */
  property: string;
  unit: string | null;
  rule: AverageRule;
  /** Null where it is not averaged (less than 90 % covered, a distance of 0) or has no direction. */
  average: number | null;
  spread: number | null;
  /** From the level's error; null where none was given. */
  uncertainty: number | null;
  /** 0 to 1. */
  covered: number;
}

/**
 * `averages.csv`: one row a property column, every digit, after RFC 4180; no cell a spreadsheet could run.
 *
 * Where less than 90 % of the population has a value, average, spread and uncertainty stay empty and `covered` says why.
 *
 * @example averagesCsv([{ property: "dipole", unit: "D", rule: "linear", average: 3.8, spread: 0.3, uncertainty: null,
 *   covered: 1 }]) // "property,unit,rule,average,spread,uncertainty,covered\r\ndipole,D,linear,3.8,0.3,,1\r\n"
 */
export function averagesCsv(rows: readonly AveragesRow[]): string {
  const lines = rows.map((row) =>
    [
      textCell(row.property),
      textCell(row.unit ?? ""),
      row.rule,
      numberCell(row.average),
      numberCell(row.spread),
      numberCell(row.uncertainty),
      numberCell(row.covered),
    ].join(","),
  );
  return `${["property,unit,rule,average,spread,uncertainty,covered", ...lines].join("\r\n")}\r\n`;
}
