import type { ColumnData } from "../column-data.ts";
import type { EnergyUnit } from "../units.ts";
import type { EnergyKind } from "../views.ts";
import type { EnergyAnswers, EnergyDecision } from "./decide-energies.ts";
import type { EnergyCandidate, EnergyFindings } from "./energies.ts";
import type { EnergyColumn } from "./energy-column.ts";
import { energyRemarks } from "./energy-remarks.ts";
import { byFrame, propertyColumns } from "./property-columns.ts";
import type { IntakeMessage } from "./report.ts";

/** A column as it goes into the database, but for ids and places. */
export interface NewColumn {
  name: string;
  kind: "energy" | "property";
  energyKind: EnergyKind | null;
  /** False where nobody said which kind of energy it is. */
  kindStated: boolean;
  temperature: number | null;
  unit: string | null;
  rule: string | null;
  origin: string;
  count: number;
  data: ColumnData;
}

export interface SettledEnergies {
  columns: NewColumn[];
  /** Those with a frame are remarks on it. */
  messages: IntakeMessage[];
}

export interface SettleOptions {
  /** Of the scan: further keys of extended comments and data fields become columns of their own. */
  findings: EnergyFindings;
  answers: EnergyAnswers;
  /** False where nobody said which kind of energy it is. */
  kindStated: boolean;
  /** Most comments are extended ones. */
  extended: boolean;
  /** Frames of the ensemble, numbered from 1. */
  frames: number;
  /** Frames that are not held. */
  accepted(frame: number): boolean;
}

/**
 * Columns and remarks of a decision that leaves no question open: the energies under the name of their level, and
 * further numbers of extended comments under their own keys.
 *
 * @example settleEnergies(decision, options).columns[0]?.name // "MMFF94"
 */
export function settleEnergies(
  decision: Exclude<EnergyDecision, { kind: "ask" }>,
  options: SettleOptions,
): SettledEnergies {
  const { findings, answers } = options;
  if (decision.kind === "none") {
    const properties = propertyColumns(findings, null, options);
    return { columns: properties.columns, messages: [...decision.messages, ...properties.messages] };
  }
  const { candidate, unit, level } = decision;
  const { column, otherUnits } = inOneUnit(candidate, unit);
  const energies: NewColumn = {
    name: level,
    kind: "energy",
    energyKind: answers.energyKind,
    kindStated: options.kindStated,
    temperature: answers.energyTemperature,
    unit,
    rule: null,
    origin: candidate.from,
    count: column.count,
    data: byFrame(column, options.frames),
  };
  const left = new Set(otherUnits.map((message) => message.frame ?? 0));
  const include = (frame: number) => options.accepted(frame) && !left.has(frame);
  const properties = propertyColumns(findings, { level, from: candidate.from }, options);
  return {
    columns: [energies, ...properties.columns],
    messages: [
      ...decision.messages,
      ...otherUnits,
      ...energyRemarks(column, { unit, kindStated: options.kindStated, include }),
      ...temperatureRemarks(answers, column.rows[0]?.file ?? ""),
      ...properties.messages,
    ],
  };
}

/** Values with another unit beside them are left out, with a remark on their frames. */
function inOneUnit(
  candidate: EnergyCandidate,
  unit: EnergyUnit,
): { column: EnergyColumn; otherUnits: IntakeMessage[] } {
  const { column, unitRows } = candidate;
  // One unit throughout that is another than the one stated: said once, and taken as stated.
  if (unitRows.size < 2) return { column, otherUnits: [] };
  const present = column.present.slice();
  const otherUnits: IntakeMessage[] = [];
  for (const [other, rows] of unitRows) {
    if (other === unit) continue;
    for (const row of rows) {
      present[row] = 0;
      const { frame, file, line } = column.rows[row]!;
      otherUnits.push({
        code: "E06",
        severity: "remark",
        file,
        frame,
        line: line + 1,
        found: other,
        message: `The energy is written in ${other}, and the level is in ${unit}: it is left out.`,
        hint: "Write all energies in one unit and take the file in again.",
      });
    }
  }
  const values = column.values.map((value, row) => (present[row] === 1 ? value : 0));
  const count = present.reduce((sum, flag) => sum + flag, 0);
  otherUnits.sort((a, b) => (a.frame ?? 0) - (b.frame ?? 0));
  return { column: { ...column, values, present, count }, otherUnits };
}

/**
 * A free energy belongs to one temperature, an electronic one to none (row E13).
 *
 * @param again what sends the same numbers once more
 */
export function temperatureRemarks(
  { energyKind, energyTemperature }: Pick<EnergyAnswers, "energyKind" | "energyTemperature">,
  file: string,
  again = "read the files again",
): IntakeMessage[] {
  if (energyKind === "free" && energyTemperature === null) {
    return [
      {
        code: "E13",
        severity: "remark",
        file,
        message: "These are free energies, and their temperature is not stated.",
        hint: `State it as energyTemperature and ${again}: populations are right at that temperature only.`,
      },
    ];
  }
  const without = energyKind === "electronic" || energyKind === "zero-point";
  if (!without || energyTemperature === null) return [];
  const kind = energyKind === "electronic" ? "Electronic energies" : "Energies with zero-point terms";
  return [
    {
      code: "E13",
      severity: "remark",
      file,
      message: `${kind} belong to no temperature: the ${energyTemperature} K that were stated are kept and not used.`,
      hint: `If they are free energies or enthalpies, say so in energyKind and ${again}.`,
    },
  ];
}
