import { and, desc, eq } from "drizzle-orm";
import { z } from "zod";
import { db } from "../../db/client.server.ts";
import { editions, verifications } from "../../db/schema.server.ts";
import {
  type EditionContent,
  type EditionFile,
  editionContentSchema,
  editionFileSchema,
  editionRecipeSchema,
} from "../../lib/edition/content.ts";
import { notFound } from "../http.server.ts";
import { productVersion } from "./product-version.ts";

/** A stored edition with its content. Positions are read apart. */
export interface FoundEdition {
  id: string;
  ensembleId: string;
  number: number;
  title: string;
  remark: string;
  createdAt: Date;
  version: string;
  contentSha256: string;
  content: EditionContent;
  files: EditionFile[];
  /** What changed since the edition before, in words. */
  changed: string[];
}

const columns = {
  id: editions.id,
  ensembleId: editions.ensembleId,
  number: editions.number,
  title: editions.title,
  remark: editions.remark,
  createdAt: editions.createdAt,
  codeVersion: editions.codeVersion,
  contentSha: editions.contentSha,
  content: editions.content,
  files: editions.files,
  recipe: editions.recipe,
};

const filesSchema = z.array(editionFileSchema);

/** One edition by its id, bound to the team of the grant. */
export async function findEdition(teamId: string, editionId: string): Promise<FoundEdition> {
  const rows = await db
    .select(columns)
    .from(editions)
    .where(and(eq(editions.id, editionId), eq(editions.teamId, teamId)))
    .limit(1);
  const row = rows[0];
  if (row === undefined) throw notFound();
  const { codeVersion, contentSha, content, files, recipe, ...rest } = row;
  return {
    ...rest,
    version: productVersion(codeVersion),
    contentSha256: contentSha?.toString("hex") ?? "",
    content: editionContentSchema.parse(JSON.parse(content)),
    files: filesSchema.parse(files),
    changed: editionRecipeSchema.parse(recipe).changed,
  };
}

/** Name, size and checksum of the files of an edition. */
export async function findEditionFiles(teamId: string, editionId: string): Promise<EditionFile[]> {
  const rows = await db
    .select({ files: editions.files })
    .from(editions)
    .where(and(eq(editions.id, editionId), eq(editions.teamId, teamId)))
    .limit(1);
  if (rows[0] === undefined) throw notFound();
  return filesSchema.parse(rows[0].files);
}

/** Coordinates that were stored beside an edition: its most populated conformers, the first first. */
export async function findPositions(editionId: string): Promise<Float64Array> {
  const rows = await db
    .select({ positions: editions.positions })
    .from(editions)
    .where(eq(editions.id, editionId))
    .limit(1);
  const data = rows[0]?.positions;
  if (data === undefined) throw notFound();
  // The driver's buffer may begin at any byte; doubles begin at a multiple of eight.
  return new Float64Array(data.buffer.slice(data.byteOffset, data.byteOffset + data.byteLength));
}

export interface LastVerification {
  same: boolean;
  at: string;
  version: string;
  seconds: number;
  files: VerifiedFile[];
}

export const verifiedFileSchema = z.object({
  name: z.string(),
  was: z.string(),
  /** Null where it could not be made: an input is gone or is another. */
  is: z.string().nullable(),
  /** Set for what went in, not out: why it is not what it was, and what was taken instead. */
  note: z.string().optional(),
});
export type VerifiedFile = z.infer<typeof verifiedFileSchema>;

/** The newest verification of an edition; null where there was none. */
export async function lastVerification(editionId: string): Promise<LastVerification | null> {
  const rows = await db
    .select()
    .from(verifications)
    .where(eq(verifications.editionId, editionId))
    .orderBy(desc(verifications.createdAt), desc(verifications.id))
    .limit(1);
  const row = rows[0];
  if (row === undefined) return null;
  return {
    same: row.same,
    at: row.createdAt.toISOString(),
    version: productVersion(row.codeVersion),
    seconds: row.seconds,
    files: z.array(verifiedFileSchema).parse(row.files),
  };
}
