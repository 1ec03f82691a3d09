import { and, asc, eq, gt, isNotNull, sql } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { frames } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { fieldsWithPoints } from "../../lib/intake/comma-energy.ts";
import { EnergyScan } from "../../lib/intake/energies.ts";
import { isExtended } from "../../lib/intake/extended-comment.ts";
import { withDecimalPoints } from "../../lib/intake/reading-choices.ts";
import type { SdfFields } from "../../lib/sdf/frame.ts";

/** Rows read at once: many short ones, or as many of the longest as fit. */
const BATCH = 2_000;
const BATCH_BYTES = 16 * 2 ** 20;

/** What is known of a file beside its frames. */
export interface ScannedFile {
  position: number;
  name: string;
  format: string;
}

/** Data fields as the reader gave them, from the pairs of their column. */
export function unpackFields(pairs: readonly (readonly [string, string])[]): SdfFields {
  const fields = new Map<string, string[]>();
  for (const [name, value] of pairs) fields.set(name, [...(fields.get(name) ?? []), value]);
  return fields;
}

export interface ScannedComments {
  scan: EnergyScan;
  firstComment: string;
  /** Most comments are extended ones, or most records have data fields. */
  extended: boolean;
}

/**
 * Looks through the stored comment lines and data fields again, once it is known which number is meant.
 *
 * @param files those of the frames
 * @param options.decimalCommas numbers of the files have them
 */
export async function scanComments(
  ensembleId: string,
  files: readonly ScannedFile[],
  energyFrom: string | null,
  options: { decimalCommas: boolean; on?: Queryable },
): Promise<ScannedComments> {
  const { decimalCommas, on = db } = options;
  const scan = new EnergyScan({ from: energyFrom, maxColumns: env().MAX_COLUMNS });
  const byPosition = new Map(files.map((file) => [file.position, file]));
  const limit = await rowsAtOnce(ensembleId, on);
  let firstComment: string | null = null;
  let seen = 0;
  let extended = 0;
  for (let last = 0; ; ) {
    const rows = await on
      .select({
        number: frames.number,
        file: frames.file,
        line: frames.line,
        comment: frames.comment,
        fields: frames.fields,
      })
      .from(frames)
      .where(and(eq(frames.ensembleId, ensembleId), gt(frames.number, last), isNotNull(frames.shape)))
      .orderBy(asc(frames.number))
      .limit(limit);
    for (const { comment, file, fields, ...row } of rows) {
      const from = byPosition.get(file);
      const sdf = from?.format.startsWith("SDF") ? unpackFields(fields ?? []) : undefined;
      const place = { ...row, file: from?.name ?? "" };
      if (decimalCommas) scan.add(place, withDecimalPoints(comment), sdf && fieldsWithPoints(sdf));
      else scan.add(place, comment, sdf);
      firstComment ??= comment;
      seen += 1;
      if (sdf ? sdf.size > 0 : isExtended(comment)) extended += 1;
    }
    const end = rows.at(-1);
    if (end === undefined || rows.length < limit) break;
    last = end.number;
  }
  return { scan, firstComment: firstComment ?? "", extended: extended * 2 > seen };
}

async function rowsAtOnce(ensembleId: string, on: Queryable): Promise<number> {
  const length = sql<number | null>`max(length(${frames.comment}) + coalesce(length(${frames.fields}), 0))`;
  const rows = await on.select({ length }).from(frames).where(eq(frames.ensembleId, ensembleId));
  return Math.max(1, Math.min(BATCH, Math.floor(BATCH_BYTES / Math.max(1, Number(rows[0]?.length ?? 1)))));
}
