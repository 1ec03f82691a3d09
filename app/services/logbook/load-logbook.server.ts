import { and, count, desc, eq, gte, inArray, isNotNull, isNull, lt, notInArray, type SQL } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { apiTokens, ensembles, logbook, users } from "../../db/schema.server.ts";
import { textCell } from "../../lib/export/csv.ts";
import { describeEntry, type LogbookType, logbookEntrySchema } from "../../lib/logbook/entries.ts";
import { type LogbookFilter, NO_FILTER, shownSince } from "../../lib/logbook/filter.ts";
import { kindOf, LOGBOOK_KINDS, typesOf } from "../../lib/logbook/kinds.ts";
import { escapeControls, escapeLines } from "../../lib/text/escape.ts";
import type { LogbookRow } from "../../lib/views.ts";
import { type Actor, accessEnsemble, accessTeam, type Grant } from "../auth/access.server.ts";

export const LOGBOOK_PAGE = 200;
/** Rows looked through for words at once, and in all. */
const BATCH = 1_000;
const MOST_SEARCHED = 50_000;

const ALL_TYPES: readonly LogbookType[] = logbookEntrySchema.options.map((option) => option.shape.type.value);

/** What whoever holds a link does. */
const BY_GUESTS: readonly LogbookType[] = ["link-opened", "link-exported"];

interface Found {
  id: number;
  createdAt: Date;
  userId: string | null;
  tokenId: string | null;
  userName: string | null;
  tokenPrefix: string | null;
  ensembleName: string | null;
  type: string;
  data: unknown;
}

/** A logbook, or what of it a filter shows. */
export interface LogbookPage {
  rows: LogbookRow[];
  /** Number to ask for what is older; null at the end. */
  older: number | null;
  /** Entries in all, whatever the filter hides. */
  total: number;
  /** Whose entries there are, for the filter. */
  people: { id: string; name: string }[];
  /** True where the caller may write a remark. */
  mayRemark: boolean;
  now: string;
}

async function find(where: SQL | undefined, before: number | null, most: number): Promise<Found[]> {
  return db
    .select({
      id: logbook.id,
      createdAt: logbook.createdAt,
      userId: logbook.userId,
      tokenId: logbook.tokenId,
      userName: users.name,
      tokenPrefix: apiTokens.prefix,
      ensembleName: ensembles.name,
      type: logbook.type,
      data: logbook.data,
    })
    .from(logbook)
    .leftJoin(users, eq(users.id, logbook.userId))
    .leftJoin(apiTokens, eq(apiTokens.id, logbook.tokenId))
    .leftJoin(ensembles, eq(ensembles.id, logbook.ensembleId))
    .where(and(where, before === null ? undefined : lt(logbook.id, before)))
    .orderBy(desc(logbook.id))
    .limit(most);
}

function labelOf(data: unknown): string {
  const label = typeof data === "object" && data !== null ? Reflect.get(data, "label") : null;
  return typeof label === "string" && label !== "" ? label : "A guest";
}

function whoOf(found: Found): Pick<LogbookRow, "who" | "by" | "from"> {
  if (BY_GUESTS.some((type) => type === found.type))
    return { who: labelOf(found.data), by: "link", from: "guest" };
  if (found.tokenId !== null) return { who: `Token ${found.tokenPrefix ?? ""}…`, by: "token", from: "API" };
  if (found.userId !== null)
    return { who: found.userName ?? "A former member", by: "person", from: "browser" };
  return { who: "Lowlying", by: "product", from: "server" };
}

function toRow(found: Found): LogbookRow {
  const read = logbookEntrySchema.safeParse({ type: found.type, data: found.data });
  const { text, detail } = read.success ? describeEntry(read.data) : { text: found.type, detail: null };
  return {
    id: found.id,
    at: found.createdAt.toISOString(),
    ...whoOf(found),
    type: found.type,
    kind: kindOf(found.type),
    ensemble: found.ensembleName === null ? null : escapeControls(found.ensembleName),
    text: escapeLines(text),
    detail: detail === null ? null : escapeLines(detail),
  };
}

/** The part of a filter that the database decides. */
function whereOf({ kind, who, when }: LogbookFilter, now: Date): SQL | undefined {
  const kinds =
    kind === "all"
      ? null
      : kind === "no-sign-ins"
        ? LOGBOOK_KINDS.filter((one) => one !== "sign-in")
        : [kind];
  const since = shownSince(when, now);
  return and(
    kinds === null ? undefined : inArray(logbook.type, typesOf(kinds, ALL_TYPES)),
    since === null ? undefined : gte(logbook.createdAt, since),
    who === "all"
      ? undefined
      : who === "token"
        ? isNotNull(logbook.tokenId)
        : who === "link"
          ? inArray(logbook.type, [...BY_GUESTS])
          : who === "product"
            ? and(isNull(logbook.userId), isNull(logbook.tokenId), notInArray(logbook.type, [...BY_GUESTS]))
            : and(eq(logbook.userId, who), isNull(logbook.tokenId)),
  );
}

/** Rows that hold every word, newest first; the words of an entry are made here, so they are looked for here. */
async function search(
  where: SQL | undefined,
  filter: LogbookFilter,
  most: number,
): Promise<{ rows: LogbookRow[]; older: number | null }> {
  const words = filter.text.toLowerCase().split(/\s+/).filter(Boolean);
  const rows: LogbookRow[] = [];
  let { before } = filter;
  const batch = words.length === 0 ? most : BATCH;
  for (let seen = 0; seen < MOST_SEARCHED; seen += batch) {
    const found = await find(where, before, batch);
    for (const one of found) {
      const row = toRow(one);
      const text = `${row.text} ${row.detail ?? ""} ${row.who} ${row.ensemble ?? ""}`.toLowerCase();
      before = row.id;
      if (words.every((word) => text.includes(word))) rows.push(row);
      if (rows.length === most) return { rows, older: before };
    }
    if (found.length < batch) return { rows, older: null };
  }
  return { rows, older: before };
}

async function peopleIn(scope: SQL | undefined): Promise<{ id: string; name: string }[]> {
  const rows = await db
    .selectDistinct({ id: users.id, name: users.name })
    .from(logbook)
    .innerJoin(users, eq(users.id, logbook.userId))
    .where(scope)
    .limit(200);
  return rows.sort((a, b) => (a.name < b.name ? -1 : 1));
}

async function page(
  grant: Grant,
  scope: SQL | undefined,
  filter: LogbookFilter,
  mayRemark: boolean,
): Promise<LogbookPage> {
  const now = new Date();
  const [found, total, people] = await Promise.all([
    search(and(scope, whereOf(filter, now)), filter, LOGBOOK_PAGE),
    db.select({ n: count() }).from(logbook).where(scope),
    grant.role === "guest" ? [] : peopleIn(scope),
  ]);
  return { ...found, total: total[0]?.n ?? 0, people, mayRemark, now: now.toISOString() };
}

/**
 * What members try on the example is theirs, and so are their links, whose openings nobody signed; a guest reads how the
 * example came about.
 */
const FOR_GUESTS = and(
  isNull(logbook.userId),
  isNull(logbook.tokenId),
  inArray(logbook.type, ["intake", "sift"]),
);

async function ensembleScope(actor: Actor, ensembleId: string) {
  const grant = await accessEnsemble(actor, "read", ensembleId);
  const own = grant.role === "guest" ? FOR_GUESTS : undefined;
  const scope = and(eq(logbook.teamId, grant.teamId), eq(logbook.ensembleId, grant.ensembleId), own);
  return { grant, scope };
}

async function teamScope(actor: Actor, teamId: string) {
  const grant = await accessTeam(actor, "read", teamId);
  return { grant, scope: eq(logbook.teamId, grant.teamId) };
}

/** The logbook of one ensemble, newest first. */
export async function loadLogbook(options: {
  actor: Actor;
  ensembleId: string;
  filter?: LogbookFilter;
}): Promise<LogbookPage> {
  const { grant, scope } = await ensembleScope(options.actor, options.ensembleId);
  return page(grant, scope, options.filter ?? NO_FILTER, grant.role !== "guest" && grant.tokenId === null);
}

/** The logbook of a whole team, newest first. */
export async function loadTeamLogbook(options: {
  actor: Actor;
  teamId: string;
  filter?: LogbookFilter;
}): Promise<LogbookPage> {
  const { grant, scope } = await teamScope(options.actor, options.teamId);
  return page(grant, scope, options.filter ?? NO_FILTER, grant.tokenId === null);
}

const CSV_HEAD = ["number", "time", "who", "by", "from", "kind", "ensemble", "text", "detail"];

/** Everything that the filter shows as CSV; no cell can run as a formula. */
async function toCsv(scope: SQL | undefined, filter: LogbookFilter): Promise<string> {
  const where = and(scope, whereOf(filter, new Date()));
  const { rows } = await search(where, { ...filter, before: null }, MOST_SEARCHED);
  const lines = rows.map((row) =>
    [
      String(row.id),
      row.at,
      ...[row.who, row.by, row.from, row.kind, row.ensemble ?? "", row.text, row.detail ?? ""].map(textCell),
    ].join(","),
  );
  return `${[CSV_HEAD.join(","), ...lines].join("\r\n")}\r\n`;
}

/** The logbook of an ensemble as CSV, as the filter shows it. */
export async function exportLogbook(options: {
  actor: Actor;
  ensembleId: string;
  filter: LogbookFilter;
}): Promise<string> {
  const { scope } = await ensembleScope(options.actor, options.ensembleId);
  return toCsv(scope, options.filter);
}

/** The logbook of a team as CSV, as the filter shows it. */
export async function exportTeamLogbook(options: {
  actor: Actor;
  teamId: string;
  filter: LogbookFilter;
}): Promise<string> {
  const { scope } = await teamScope(options.actor, options.teamId);
  return toCsv(scope, options.filter);
}
