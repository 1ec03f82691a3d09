import type { ColumnData } from "../column-data.ts";
import type { EnergyKind } from "../views.ts";
import type { EnergyAnswers, EnergyDecision } from "./decide-energies.ts";
import type { EnergyCandidate } from "./energies.ts";
import type { EnergyColumn } from "./energy-column.ts";
import { energyRemarks } from "./energy-remarks.ts";
import type { IntakeMessage } from "./report.ts";

/** A column as it goes into the database, but for ids and places. */
export interface NewColumn {
  name: string;
  kind: "energy" | "property";
  energyKind: EnergyKind | null;
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
  /** All candidates of the scan: further keys of extended comments become columns of their own. */
  candidates: readonly EnergyCandidate[];
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

const MAX_PROPERTIES = 64;
const MAX_NAME = 120;
/** Keys with a meaning of their own. */
const RESERVED = new Set([
  "name",
  "label",

  "charge",
  "total_charge",
  "net_charge",
  "multiplicity",
  "spin_multiplicity",
  "mult",
]);

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
  const properties = propertyColumns(decision, options);
  if (decision.kind === "none") return { columns: properties, messages: decision.messages };
  const { candidate, unit, level } = decision;
  const { answers, kindStated } = options;
  const energies: NewColumn = {
    name: level,
    kind: "energy",
    energyKind: answers.energyKind,
    temperature: answers.energyTemperature,
    unit,
    rule: null,
    origin: candidate.from,
    count: candidate.column.count,
    data: byFrame(candidate.column, options.frames),
  };
  const remarks = energyRemarks(candidate.column, { unit, kindStated, include: options.accepted });
  return { columns: [energies, ...properties], messages: [...decision.messages, ...remarks] };
}

function propertyColumns(
  decision: Exclude<EnergyDecision, { kind: "ask" }>,
  options: SettleOptions,
): NewColumn[] {
  if (!options.extended) return [];
  const taken = decision.kind === "column" ? decision : null;
  return options.candidates
    .flatMap((candidate): NewColumn[] => {
      const { key, from, units, unitless } = candidate;
      if (key === null || from === taken?.candidate.from || key === taken?.level) return [];
      if (RESERVED.has(key.toLowerCase()) || key.length > MAX_NAME) return [];
      const [unit] = units.keys();
      return [
        {
          name: key,
          kind: "property",
          energyKind: null,
          temperature: null,
          unit: units.size === 1 && unitless === 0 ? (unit ?? null) : null,
          rule: "linear",
          origin: from,
          count: candidate.column.count,
          data: byFrame(candidate.column, options.frames),
        },
      ];
    })
    .sort((a, b) => (a.name < b.name ? -1 : 1))
    .slice(0, MAX_PROPERTIES);
}

/** Frames that could not be read have no row in the scan, and no value. */
function byFrame(column: EnergyColumn, frames: number): ColumnData {
  const data = { values: new Float64Array(frames), present: new Uint8Array(frames) };
  column.rows.forEach(({ frame }, row) => {
    data.values[frame - 1] = column.values[row]!;
    data.present[frame - 1] = column.present[row]!;
  });
  return data;
}
