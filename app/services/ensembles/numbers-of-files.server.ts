import { and, asc, eq, isNotNull, sql } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { frames } from "../../db/schema.server.ts";
import { commaEnergy, commaField, fieldsWithPoints } from "../../lib/intake/comma-energy.ts";
import { EnergyScan } from "../../lib/intake/energies.ts";
import { withDecimalPoints } from "../../lib/intake/reading-choices.ts";
import type { NumberView } from "../../lib/views.ts";
import { unpackFields } from "./scan-comments.server.ts";

/** Frames that are looked at, characters of each comment, and numbers that are offered. */
const LOOKED_AT = 3;
const CHARACTERS = 4_000;
const OFFERED = 40;

/** The numbers that the first frames carry in comment lines and data fields: what can be named as the energy. */
export async function numbersOfFiles(ensembleId: string): Promise<NumberView[]> {
  const rows = await db
    .select({
      number: frames.number,
      line: frames.line,
      comment: sql<string>`left(${frames.comment}, ${CHARACTERS})`,
      fields: frames.fields,
    })
    .from(frames)
    .where(and(eq(frames.ensembleId, ensembleId), isNotNull(frames.shape)))
    .orderBy(asc(frames.number))
    .limit(LOOKED_AT);
  const scan = new EnergyScan();
  for (const { comment, fields, number, line } of rows) {
    const own = fields === null ? undefined : unpackFields(fields);
    const numbers = commaEnergy(comment) === null ? comment : withDecimalPoints(comment);
    const commas = own !== undefined && commaField(own) !== null;
    scan.add({ number, line, file: "" }, numbers, commas ? fieldsWithPoints(own) : own);
  }
  return scan
    .finish()
    .candidates.slice(0, OFFERED)
    .map(({ from, key, position, first }) => ({
      from,
      name: key ?? `number ${position} of the comment line`,
      example: first.find((text) => text !== null) ?? null,
    }));
}
