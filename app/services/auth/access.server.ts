import { and, eq, isNotNull, isNull, sql } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { isId } from "../../db/new-id.server.ts";
import {
  apiTokens,
  editions,
  ensembles,
  links,
  members,
  sifts,
  teams,
  users,
} from "../../db/schema.server.ts";
import type { DomainError } from "../../lib/errors.ts";
import { forbidden, notFound } from "../http.server.ts";

/** Who calls. */
export type Actor =
  | { kind: "anonymous" }
  | { kind: "user"; userId: string; sessionId: string; origin?: string }
  | {
      kind: "token";
      userId: string;
      tokenId: string;
      teamId: string;
      scope: "full" | "read" | "add";
      /** Address of the call, as the trusted proxy setting gives it; for the logbook. */
      origin?: string;
    };

/** What an act does to its object. */
export type Verb =
  | "read"
  | "read-source"
  /** Takes files in, answers what intake asked: the one act of tokens narrowed to adding. */
  | "take-in"
  /** Takes in, computes, names, holds, releases. */
  | "compute"
  | "remark"
  | "share"
  /** People, roles, others' tokens, deletion. */
  | "manage"
  /** One's own tokens. */
  | "tokens";

export type MemberRole = "owner" | "analyst" | "reader";

/** What the caller is, in the team of the object. `onlyOwnOfToken` narrows lists to what that token took in. */
export interface Grant {
  teamId: string;
  role: MemberRole | "guest";
  userId: string | null;
  tokenId: string | null;
  onlyOwnOfToken: string | null;
  /** Address of the call, for the logbook. */
  origin?: string | null;
}

const ROLE_MAY: Record<Grant["role"], readonly Verb[]> = {
  owner: ["read", "read-source", "take-in", "compute", "remark", "share", "manage", "tokens"],
  analyst: ["read", "read-source", "take-in", "compute", "remark", "share", "tokens"],
  reader: ["read", "read-source", "remark", "tokens"],
  guest: ["read", "read-source"],
};

/** A token never acts on people, remarks, editions or links, whatever its user may do. */
const SCOPE_MAY = {
  full: ["read", "read-source", "take-in", "compute"],
  read: ["read", "read-source"],
  add: ["read", "read-source", "take-in"],
} as const satisfies Record<string, readonly Verb[]>;

const REFUSALS: Record<Verb, string> = {
  read: "You may not read this.",
  "read-source": "You may not download the source files.",
  "take-in": "Taking files in needs the role of an analyst or owner in this team.",
  compute:
    "Taking files in, computing, naming, holding and releasing need the role of an analyst or owner in this team.",
  remark: "Writing a remark needs a member of the team who is signed in.",
  share: "Sharing needs the role of an analyst or owner in this team.",
  manage: "Only an owner of the team may do this.",
  tokens: "Tokens are made and ended by members of the team who are signed in.",
};

/** True where role and scope together allow the verb; `role` null is no access at all. */
export function roleMay(role: Grant["role"], verb: Verb): boolean {
  return ROLE_MAY[role].includes(verb);
}

function refusal(actor: Actor, verb: Verb): DomainError {
  if (actor.kind !== "token" || actor.scope === "full") return forbidden(REFUSALS[verb]);
  const what = actor.scope === "read" ? "read" : "take files in and see what it took in";
  return forbidden(`This token may only ${what}. ${REFUSALS[verb]}`);
}

/**
 * True in SQL while a token lives. It was looked up when the call came; asked again here, so that one that is revoked or
 * runs out in the middle of a long answer ends it as a lost role does.
 */
const tokenLives = (actor: Exclude<Actor, { kind: "anonymous" }>) =>
  actor.kind === "token"
    ? sql`exists (select 1 from ${apiTokens} where ${apiTokens.id} = ${actor.tokenId} and ${apiTokens.revokedAt} is null and (${apiTokens.endsAt} is null or ${apiTokens.endsAt} > utc_timestamp(3)))`
    : undefined;

/** The role the actor has in a team right now; null without one. Roles are looked up on every call. */
async function roleIn(actor: Actor, teamId: string): Promise<MemberRole | null> {
  if (actor.kind === "anonymous") return null;
  if (actor.kind === "token" && actor.teamId !== teamId) return null;
  const rows = await db
    .select({ role: members.role })
    .from(members)
    .innerJoin(users, and(eq(users.id, members.userId), isNull(users.disabledAt)))
    .innerJoin(teams, and(eq(teams.id, members.teamId), isNull(teams.deletedAt)))
    .where(and(eq(members.teamId, teamId), eq(members.userId, actor.userId), tokenLives(actor)))
    .limit(1);
  return rows[0]?.role ?? null;
}

function grantOf(actor: Actor, teamId: string, role: Grant["role"]): Grant {
  const token = actor.kind === "token" ? actor : null;
  return {
    teamId,
    role,
    userId: actor.kind === "anonymous" ? null : actor.userId,
    tokenId: token?.tokenId ?? null,
    origin: actor.kind === "anonymous" ? null : (actor.origin ?? null),
    onlyOwnOfToken: token?.scope === "add" ? token.tokenId : null,
  };
}

function may(actor: Actor, role: Grant["role"], verb: Verb): boolean {
  if (!roleMay(role, verb)) return false;
  return actor.kind !== "token" || (SCOPE_MAY[actor.scope] as readonly Verb[]).includes(verb);
}

/**
 * Decides on an act in a team. The one place, with its two companions below, that decides access; every service
 * calls one of the three and binds its queries to the team of the grant.
 *
 * A token narrowed to adding passes "compute" here, since in a team that means a new ensemble; it does not pass
 * it on an ensemble.
 *
 * @throws DomainError not-found without any access (foreign and missing look alike), forbidden for a member who
 *   may not do it
 */
export async function accessTeam(actor: Actor, verb: Verb, teamId: string): Promise<Grant> {
  const role = isId(teamId) ? await roleIn(actor, teamId) : null;
  if (role === null) throw notFound();
  const asked = actor.kind === "token" && actor.scope === "add" && verb === "compute" ? "take-in" : verb;
  if (!may(actor, role, asked)) throw refusal(actor, verb);
  return grantOf(actor, teamId, role);
}

/**
 * Decides on bringing a deleted team back: its owners may, for everybody else there is nothing here.
 *
 * @throws DomainError not-found
 */
export async function accessDeletedTeam(actor: Actor, teamId: string): Promise<Grant> {
  if (actor.kind !== "user" || !isId(teamId)) throw notFound();
  const rows = await db
    .select({ role: members.role })
    .from(members)
    .innerJoin(users, and(eq(users.id, members.userId), isNull(users.disabledAt)))
    .innerJoin(teams, and(eq(teams.id, members.teamId), isNotNull(teams.deletedAt)))
    .where(and(eq(members.teamId, teamId), eq(members.userId, actor.userId), eq(members.role, "owner")))
    .limit(1);
  if (rows.length === 0) throw notFound();
  return grantOf(actor, teamId, "owner");
}

interface Found {
  ensembleId: string;
  teamId: string;
  example: boolean;
  createdByToken: string | null;
  role: MemberRole | null;
}

const foundFields = (actor: Actor) => ({
  ensembleId: ensembles.id,
  teamId: ensembles.teamId,
  example: ensembles.example,
  createdByToken: ensembles.createdByToken,
  role: actor.kind === "anonymous" ? sql<null>`null` : members.role,
});

/** Membership of the actor, and none once its account is disabled. */
const membership = (actor: Exclude<Actor, { kind: "anonymous" }>) =>
  and(
    eq(members.teamId, ensembles.teamId),
    eq(members.userId, actor.userId),
    sql`exists (select 1 from ${users} where ${users.id} = ${members.userId} and ${users.disabledAt} is null)`,
    tokenLives(actor),
  );

function decide(actor: Actor, verb: Verb, found: Found | undefined): Grant & { ensembleId: string } {
  if (found === undefined) throw notFound();
  const foreignToToken =
    actor.kind === "token" &&
    (actor.teamId !== found.teamId || (actor.scope === "add" && found.createdByToken !== actor.tokenId));
  if (foreignToToken) throw notFound();
  const role = found.role ?? (found.example ? "guest" : null);
  if (role === null) throw notFound();
  if (!may(actor, role, verb)) throw refusal(actor, verb);
  return { ...grantOf(actor, found.teamId, role), ensembleId: found.ensembleId };
}

async function findEnsemble(actor: Actor, ensembleId: string): Promise<Found | undefined> {
  const living = and(
    eq(ensembles.id, ensembleId),
    isNull(ensembles.deletedAt),
    // A deleted team takes its work along, the live example too.
    sql`exists (select 1 from ${teams} where ${teams.id} = ${ensembles.teamId} and ${teams.deletedAt} is null)`,
  );
  const query = db.select(foundFields(actor)).from(ensembles).$dynamic();
  const joined = actor.kind === "anonymous" ? query : query.leftJoin(members, membership(actor));
  return (await joined.where(living).limit(1))[0];
}

/** Decides on an act on an ensemble; an example may be read by anybody, as a guest. Throws as `accessTeam`. */
export async function accessEnsemble(
  actor: Actor,
  verb: Verb,
  ensembleId: string,
): Promise<Grant & { ensembleId: string }> {
  return decide(actor, verb, isId(ensembleId) ? await findEnsemble(actor, ensembleId) : undefined);
}

/** Decides on an act on a sift by the ensemble it belongs to. Throws as `accessTeam`. */
export async function accessSift(
  actor: Actor,
  verb: Verb,
  siftId: string,
): Promise<Grant & { ensembleId: string; siftId: string }> {
  if (!isId(siftId)) throw notFound();
  const rows = await db
    .select({ ensembleId: sifts.ensembleId })
    .from(sifts)
    .where(eq(sifts.id, siftId))
    .limit(1);
  const ensembleId = rows[0]?.ensembleId;
  if (ensembleId === undefined) throw notFound();
  return { ...(await accessEnsemble(actor, verb, ensembleId)), siftId };
}

/**
 * Decides on an act on an edition by the ensemble it was frozen from. Guests of the example see none: what members freeze
 * there is theirs. Throws as `accessTeam`.
 */
export async function accessEdition(
  actor: Actor,
  verb: Verb,
  ensembleId: string,
  number: number,
): Promise<Grant & { ensembleId: string; editionId: string; number: number }> {
  const grant = await accessEnsemble(actor, verb, ensembleId);
  if (grant.role === "guest" || !Number.isSafeInteger(number) || number < 1 || number > 2 ** 31 - 1) {
    throw notFound();
  }
  const rows = await db
    .select({ editionId: editions.id })
    .from(editions)
    .where(
      and(
        eq(editions.teamId, grant.teamId),
        eq(editions.ensembleId, grant.ensembleId),
        eq(editions.number, number),
      ),
    )
    .limit(1);
  const editionId = rows[0]?.editionId;
  if (editionId === undefined) throw notFound();
  return { ...grant, editionId, number };
}

/** Decides on an act on a link by the ensemble whose edition it shows. Throws as `accessTeam`. */
export async function accessLink(
  actor: Actor,
  verb: Verb,
  linkId: string,
): Promise<Grant & { ensembleId: string; linkId: string }> {
  if (!isId(linkId)) throw notFound();
  const rows = await db
    .select({ ensembleId: editions.ensembleId })
    .from(links)
    .innerJoin(editions, eq(editions.id, links.editionId))
    .where(eq(links.id, linkId))
    .limit(1);
  const ensembleId = rows[0]?.ensembleId;
  if (ensembleId === undefined) throw notFound();
  return { ...(await accessEnsemble(actor, verb, ensembleId)), linkId };
}

/** Whoever holds the secret of a link: a guest of one edition, and of nothing else. */
export interface LinkGrant {
  live: true;
  linkId: string;
  teamId: string;
  ensembleId: string;
  editionId: string;
  prefix: string;
  label: string;
  contact: string;
  sources: boolean;
  logbook: boolean;
  endsAt: Date;
}

/** A link that was there once: its holder is told that it has ended, and whom to ask. */
export interface EndedLink {
  live: false;
  endedAt: Date;
  contact: string;
}

/**
 * Decides what the holder of a link's secret may see, by the checksum of the secret; null for any other text. A link ends
 * on its day, by hand, and with the ensemble or the team that it shows something of.
 *
 * @param secretSha SHA-256 of the secret in the address
 */
export async function accessBySecret(
  secretSha: Buffer,
  now = new Date(),
): Promise<LinkGrant | EndedLink | null> {
  const rows = await db
    .select({
      linkId: links.id,
      teamId: links.teamId,
      ensembleId: editions.ensembleId,
      editionId: links.editionId,
      prefix: links.prefix,
      label: links.label,
      contact: links.contact,
      sources: links.sources,
      logbook: links.logbook,
      endsAt: links.endsAt,
      revokedAt: links.revokedAt,
      ensembleDeletedAt: ensembles.deletedAt,
      teamDeletedAt: teams.deletedAt,
    })
    .from(links)
    .innerJoin(editions, eq(editions.id, links.editionId))
    .innerJoin(ensembles, and(eq(ensembles.id, editions.ensembleId), eq(ensembles.teamId, links.teamId)))
    .innerJoin(teams, eq(teams.id, links.teamId))
    .where(eq(links.secretSha, secretSha))
    .limit(1);
  const row = rows[0];
  if (row === undefined) return null;
  const { revokedAt, ensembleDeletedAt, teamDeletedAt, ...grant } = row;
  const ends = [row.endsAt, revokedAt, ensembleDeletedAt, teamDeletedAt].filter((at) => at !== null);
  const endedAt = new Date(Math.min(...ends.map((at) => at.getTime())));
  return endedAt <= now ? { live: false, endedAt, contact: row.contact } : { live: true, ...grant };
}
