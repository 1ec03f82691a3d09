import { and, asc, eq, gt, isNotNull } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { frames } from "../../db/schema.server.ts";
import { EnergyScan } from "../../lib/intake/energies.ts";
import { isExtended } from "../../lib/intake/extended-comment.ts";

const BATCH = 2_000;

export interface ScannedComments {
  scan: EnergyScan;
  firstComment: string;
  /** Most comments are extended ones. */
  extended: boolean;
}

/**
 * Looks through the stored comment lines again, once it is known which number is meant.
 *
 * @param fileNames by position
 */
export async function scanComments(
  ensembleId: string,
  fileNames: readonly string[],
  energyFrom: string | null,
  on: Queryable = db,
): Promise<ScannedComments> {
  const scan = new EnergyScan({ from: energyFrom });
  let firstComment: string | null = null;
  let seen = 0;
  let extended = 0;
  for (let last = 0; ; ) {
    const rows = await on
      .select({ number: frames.number, file: frames.file, line: frames.line, comment: frames.comment })
      .from(frames)
      .where(and(eq(frames.ensembleId, ensembleId), gt(frames.number, last), isNotNull(frames.shape)))
      .orderBy(asc(frames.number))
      .limit(BATCH);
    for (const { comment, file, ...row } of rows) {
      scan.add({ ...row, file: fileNames[file] ?? "" }, comment);
      firstComment ??= comment;
      seen += 1;
      if (isExtended(comment)) extended += 1;
    }
    const end = rows.at(-1);
    if (end === undefined || rows.length < BATCH) break;
    last = end.number;
  }
  return { scan, firstComment: firstComment ?? "", extended: extended * 2 > seen };
}
