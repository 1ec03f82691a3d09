import { and, desc, eq, isNull, lt, type SQL } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { apiTokens, logbook, users } from "../../db/schema.server.ts";
import { describeEntry, logbookEntrySchema } from "../../lib/logbook/entries.ts";
import type { LogbookRow } from "../../lib/views.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";

const PAGE = 200;

interface Found {
  id: number;
  createdAt: Date;
  userId: string | null;
  tokenId: string | null;
  userName: string | null;
  tokenPrefix: string | null;
  type: string;
  data: unknown;
}

async function find(where: SQL | undefined, before: number | undefined): Promise<Found[]> {
  return db
    .select({
      id: logbook.id,
      createdAt: logbook.createdAt,
      userId: logbook.userId,
      tokenId: logbook.tokenId,
      userName: users.name,
      tokenPrefix: apiTokens.prefix,
      type: logbook.type,
      data: logbook.data,
    })
    .from(logbook)
    .leftJoin(users, eq(users.id, logbook.userId))
    .leftJoin(apiTokens, eq(apiTokens.id, logbook.tokenId))
    .where(and(where, before === undefined ? undefined : lt(logbook.id, before)))
    .orderBy(desc(logbook.id))
    .limit(PAGE);
}

function toRow(found: Found): LogbookRow {
  const read = logbookEntrySchema.safeParse({ type: found.type, data: found.data });
  const words = read.success ? describeEntry(read.data) : { text: found.type, detail: null };
  const by = found.tokenId !== null ? "token" : found.userId !== null ? "person" : "product";
  const who =
    by === "product"
      ? "Lowlying"
      : by === "token"
        ? `Token ${found.tokenPrefix ?? ""}…`
        : (found.userName ?? "A former member");
  return { id: found.id, at: found.createdAt.toISOString(), who, by, type: found.type, ...words };
}

/**
 * The logbook of one ensemble, newest first.
 *
 * @param options.before id of the last row seen, for the page after it
 */
export async function loadLogbook(options: {
  actor: Actor;
  ensembleId: string;
  before?: number;
}): Promise<LogbookRow[]> {
  const grant = await accessEnsemble(options.actor, "read", options.ensembleId);
  // What members try on the example is theirs; a guest reads how it came about.
  const own = grant.role === "guest" ? and(isNull(logbook.userId), isNull(logbook.tokenId)) : undefined;
  const where = and(eq(logbook.teamId, grant.teamId), eq(logbook.ensembleId, grant.ensembleId), own);
  return (await find(where, options.before)).map(toRow);
}
