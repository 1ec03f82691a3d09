import { and, eq, inArray, sql } from "drizzle-orm";
import type { Queryable, Transaction } from "../../db/client.server.ts";
import { columns, ensembleFiles, type ensembles, frames, intakeMessages } from "../../db/schema.server.ts";
import type { Warnings } from "../../lib/api/schemas.ts";
import { packedFrames, unpackColumn } from "../../lib/column-data.ts";
import { asEnergyUnit } from "../../lib/intake/batch-energies.ts";
import { MessageList } from "../../lib/intake/message-list.ts";
import type { IntakeMessage } from "../../lib/intake/report.ts";
import type { NewColumn } from "../../lib/intake/settle-energies.ts";
import { batchSpread, type LevelEnergies, spreadWarning } from "../../lib/intake/whole-spread.ts";
import { insertMessages, remarkFrames } from "./intake-rows.server.ts";

/** One character a frame in file order: "1" where it takes part, or will once an answer has come. */
async function usedText(on: Queryable, ensembleId: string): Promise<string> {
  const mark = sql`if(${frames.state} = 'held' and coalesce(${frames.holdReason}, '') <> 'waits-for-answer', '0', '1')`;
  const rows = await on
    .select({ text: sql<string | null>`group_concat(${mark} order by ${frames.number} separator '')` })
    .from(frames)
    .where(eq(frames.ensembleId, ensembleId));
  return rows[0]?.text ?? "";
}

type LevelRow = Pick<typeof columns.$inferSelect, "name" | "unit" | "data">;

function energiesOf({ name, unit, data }: LevelRow, used: string): LevelEnergies | null {
  const known = asEnergyUnit(unit);
  if (known === null) return null;
  const { values, present } = unpackColumn(data, packedFrames(data));
  const numbers = [...used].flatMap((mark, k) => (mark === "1" && present[k] === 1 ? [k + 1] : []));
  return { name, unit: known, frames: numbers, values: numbers.map((frame) => values[frame - 1] ?? 0) };
}

/** Where frames stand in their files; those that carry a remark on their energy already are left out. */
async function placesOf(tx: Transaction, ensembleId: string, numbers: readonly number[]) {
  if (numbers.length === 0) return new Map<number, { file: string; line: number }>();
  const said = await tx
    .select({ frame: intakeMessages.frame })
    .from(intakeMessages)
    .where(and(eq(intakeMessages.ensembleId, ensembleId), eq(intakeMessages.code, "E12")));
  const known = new Set(said.map(({ frame }) => frame));
  const rows = await tx
    .select({
      number: frames.number,
      line: frames.line,
      file: sql<string>`coalesce(${ensembleFiles.entry}, ${ensembleFiles.name})`,
    })
    .from(frames)
    .innerJoin(
      ensembleFiles,
      and(eq(ensembleFiles.ensembleId, frames.ensembleId), eq(ensembleFiles.position, frames.file)),
    )
    .where(and(eq(frames.ensembleId, ensembleId), inArray(frames.number, [...numbers])));
  return new Map(
    rows.flatMap(({ number, ...place }) => (known.has(number) ? [] : [[number, place] as const])),
  );
}

/**
 * Judges the energies of a whole ensemble once a batch has joined it: what each part by itself cannot show (row E12).
 *
 * @param target with the number of its frames before the batch
 * @param made columns that the batch brought
 */
export async function judgeSpread(
  tx: Transaction,
  target: Pick<typeof ensembles.$inferSelect, "id" | "frames">,
  made: readonly NewColumn[],
  file: string,
): Promise<void> {
  if (made.length === 0) return;
  const used = await usedText(tx, target.id);
  const levels = await tx
    .select({ name: columns.name, unit: columns.unit, data: columns.data })
    .from(columns)
    .where(and(eq(columns.ensembleId, target.id), eq(columns.kind, "energy")));
  const list = new MessageList();
  for (const row of levels) {
    const energies = energiesOf(row, used);
    const found = energies === null ? [] : batchSpread(energies, target.frames + 1);
    const named = found.flatMap(({ frame }) => (frame === undefined ? [] : [frame]));
    const places = await placesOf(tx, target.id, named);
    for (const finding of found) {
      const place = finding.frame === undefined ? { file } : places.get(finding.frame);
      if (place) list.add({ code: "E12", severity: "remark", ...place, ...finding });
    }
  }
  const messages: IntakeMessage[] = list.messages();
  await insertMessages(tx, target.id, messages);
  await remarkFrames(tx, target.id, messages);
}

/**
 * What is to be known of everything that is computed at a level: its energies lie farther apart, or nearer together, than
 * those of one molecule's conformers.
 */
export async function levelWarnings(
  on: Queryable,
  ensembleId: string,
  levelId: string | null,
): Promise<Warnings> {
  if (levelId === null) return [];
  const [row] = await on
    .select({ name: columns.name, unit: columns.unit, data: columns.data })
    .from(columns)
    .where(and(eq(columns.ensembleId, ensembleId), eq(columns.id, levelId)));
  const energies = row && energiesOf(row, await usedText(on, ensembleId));
  const message = energies ? spreadWarning(energies.name, energies.unit, energies.values) : null;
  return message === null ? [] : [{ code: "E12", message }];
}
