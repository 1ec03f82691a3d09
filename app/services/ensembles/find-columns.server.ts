import { asc, eq, sql } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns } from "../../db/schema.server.ts";
import { countsUp } from "../../lib/averages/counter.ts";
import type { ColumnData } from "../../lib/column-data.ts";
import { unpackColumn, unpackPresence } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import type { EnergyKind, LevelView } from "../../lib/views.ts";
import { countPresent } from "./accepted-frames.server.ts";

const HEAD_FRAMES = 32;

/** A column with the counts that its numbers give, without the numbers. */
export interface FoundColumn {
  id: string;
  name: string;
  kind: "energy" | "property";
  ordinal: number;
  energyKind: EnergyKind | null;
  temperature: number | null;
  unit: string | null;
  dataSha: Buffer;
  /** False while an energy is only taken as electronic because nobody said. */
  kindStated: boolean;
  geometryLevel: string | null;
  solvent: string | null;
  /** Of a property: linear, r-6, r-3 or circular. */
  rule: string | null;
  /** Per-atom properties: what they share, and the atom from 1. */
  quantity: string | null;
  atom: number | null;
  origin: string | null;
  definition: (typeof columns.$inferSelect)["definition"];
  /** True for a property that only counts frames up: a label, which nobody averages. */
  counter: boolean;
  /** Accepted frames with and without a value. */
  count: number;
  missing: number;
}

/**
 * All columns of an ensemble in order of arrival.
 *
 * @param strip one character a frame, "h" where held
 */
export async function findColumns(ensembleId: string, strip: string): Promise<FoundColumn[]> {
  const rows = await db
    .select({
      id: columns.id,
      name: columns.name,
      kind: columns.kind,
      ordinal: columns.ordinal,
      energyKind: columns.energyKind,
      temperature: columns.temperature,
      unit: columns.unit,
      dataSha: columns.dataSha,
      kindStated: columns.kindStated,
      geometryLevel: columns.geometryLevel,
      solvent: columns.solvent,
      rule: columns.rule,
      quantity: columns.quantity,
      atom: columns.atom,
      origin: columns.origin,
      definition: columns.definition,
      // Enough of the doubles to tell a counter.
      head: sql<Buffer>`substring(${columns.data}, 1, ${8 * Math.min(HEAD_FRAMES, strip.length)})`,
      // Only the presence bits behind the doubles.
      bits: sql<Buffer>`substring(${columns.data}, ${8 * strip.length + 1})`,
    })
    .from(columns)
    .where(eq(columns.ensembleId, ensembleId))
    .orderBy(asc(columns.kind), asc(columns.ordinal));
  return rows.map(({ head, bits, dataSha, ...row }) => ({
    ...row,
    counter: row.kind === "property" && row.unit === null && headCountsUp(head, bits),
    dataSha: dataSha ?? Buffer.alloc(32),
    ...countPresent(bits, strip),
  }));
}

/** Whether the first frames of a packed column count up. */
function headCountsUp(head: Buffer, bits: Buffer): boolean {
  const frames = Array.from({ length: Math.floor(head.length / 8) }, (_, k) => k + 1);
  const present = unpackPresence(bits, frames.length);
  return countsUp(
    frames,
    frames.map((_, k) => (present[k] === 1 ? head.readDoubleLE(8 * k) : null)),
  );
}

/** The energy columns, as the page and the API list them. */
export function toLevels(found: readonly FoundColumn[]): LevelView[] {
  return found
    .filter((column) => column.kind === "energy")
    .map((column) => ({
      id: column.id,
      name: column.name,
      unit: column.unit ?? "",
      count: column.count,
      missing: column.missing,
      ordinal: column.ordinal,
      energyKind: column.energyKind ?? "electronic",
      temperature: column.temperature,
    }));
}

/**
 * The level that a request names by id or name.
 *
 * @throws DomainError invalid (422) that lists those there are
 */
export function pickLevel<Level extends { id: string; name: string }>(
  levels: readonly Level[],
  asked: string,
): Level {
  const found = levels.find((level) => level.id === asked) ?? levels.find((level) => level.name === asked);
  if (found) return found;
  const there =
    levels.length === 0
      ? "This ensemble has no energies."
      : `It has ${levels.map((level) => `"${level.name}"`).join(", ")}.`;
  const message = `No level "${asked}" in this ensemble. ${there}`;
  throw new DomainError("invalid", "Unknown level", message, { faults: [{ field: "level", message }] });
}

/** The numbers of one column, in its own unit as written. */
export async function loadColumn(columnId: string, frames: number): Promise<ColumnData> {
  const rows = await db.select({ data: columns.data }).from(columns).where(eq(columns.id, columnId));
  const data = rows[0]?.data;
  if (data === undefined) throw new Error(`Column ${columnId} is missing.`);
  return unpackColumn(data, frames);
}
