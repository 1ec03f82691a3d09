import { eq } from "drizzle-orm";
import { z } from "zod";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { editions, links, teams, users } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { type Actor, accessEdition } from "../auth/access.server.ts";
import { takeAttempt } from "../auth/throttle.server.ts";
import { notFound } from "../http.server.ts";
import { type Doer, writeEntry } from "../logbook/write-entry.server.ts";
import { linkLetter } from "../mail/letters.ts";
import { queueMail } from "../mail/queue-mail.server.ts";
import { addressSchema } from "../people/people-fields.ts";
import { linkPrefix, linkSha, newLinkSecret } from "./link-secret.ts";

const DAY_MS = 86_400_000;
const LETTERS_A_DAY = 100;
export const DEFAULT_LINK_DAYS = 14;

export const newLinkSchema = z.strictObject({
  label: z.string().trim().min(1, "Say for whom the link is.").max(120, "Up to 120 characters."),
  /** Whoever holds an ended link reads it. */
  contact: z.string().trim().max(200, "Up to 200 characters."),
  days: z
    .number({ error: "A whole number of days." })
    .int("A whole number of days.")
    .min(1, "At least one day."),
  sources: z.boolean(),
  logbook: z.boolean(),
  /** Whom the link is sent to by letter; kept only as long as the letter waits. */
  email: addressSchema.nullable().optional(),
});
export type NewLink = z.infer<typeof newLinkSchema>;

export interface MadeLink {
  /** Shown once, kept nowhere. */
  secret: string;
  prefix: string;
  endsAt: Date;
}

interface At extends Doer {
  teamId: string;
  ensembleId: string;
  editionId: string;
}

/** Refuses a life longer than the team allows. */
export function needDays(days: number, most: number): void {
  if (days <= most) return;
  const message = `A link of this team lives at most ${most} days; an owner can change that on the team's page.`;
  throw new DomainError("invalid", "Too long", message, { faults: [{ field: "days", message }] });
}

/** Who shares, as the letter names them. */
async function makerName(tx: Transaction, userId: string | null): Promise<string> {
  if (userId === null) return "Somebody";
  const rows = await tx.select({ name: users.name }).from(users).where(eq(users.id, userId));
  return rows[0]?.name ?? "Somebody";
}

/** Refuses where a team has sent as many links by letter as it may in a day. */
async function needLetter(teamId: string): Promise<void> {
  const limit = { kind: "link-letter", subject: teamId, limit: LETTERS_A_DAY, seconds: 86_400 };
  const wait = await takeAttempt(limit);
  if (wait === null) return;
  const message =
    "The team has sent 100 links by letter today. Leave this empty and send the address yourself.";
  throw new DomainError("too-many", "Not made", message, {
    faults: [{ field: "email", message }],
    extra: { retryAfter: wait },
  });
}

/**
 * Makes a link to an edition; access has been decided before.
 *
 * @param asked.days 0 makes one that has ended already: what its holder reads then can be looked at
 * @throws DomainError invalid where it would live longer than the team allows
 */
export async function makeLinkFor(at: At, asked: NewLink, now = new Date()): Promise<MadeLink> {
  const secret = newLinkSecret();
  const prefix = linkPrefix(secret);
  const endsAt = new Date(now.getTime() + asked.days * DAY_MS);
  const email = asked.email ?? null;
  if (email !== null) await needLetter(at.teamId);
  await inTransaction(async (tx) => {
    const rows = await tx
      .select({ number: editions.number, linkDays: teams.linkDays })
      .from(editions)
      .innerJoin(teams, eq(teams.id, editions.teamId))
      .where(eq(editions.id, at.editionId));
    const row = rows[0];
    if (row === undefined) throw notFound();
    needDays(asked.days, row.linkDays);
    await tx.insert(links).values({
      id: newId(),
      teamId: at.teamId,
      editionId: at.editionId,
      secretSha: linkSha(secret),
      prefix,
      label: asked.label,
      contact: asked.contact,
      sources: asked.sources,
      logbook: asked.logbook,
      createdBy: at.userId,
      createdAt: now,
      endsAt,
    });
    const { label, sources, logbook } = asked;
    await writeEntry(tx, at, at, {
      type: "link-made",
      data: {
        ...{ number: row.number, prefix, label, endsAt: endsAt.toISOString(), sources, logbook },
        ...(email === null ? {} : { mailed: true }),
      },
    });
    if (email === null) return;
    const by = await makerName(tx, at.userId);
    const address = `${env().APP_ORIGIN}/e/${secret}`;
    const day = endsAt.toISOString().slice(0, 10);
    await queueMail(linkLetter({ recipient: email, by, address, day }), tx);
  });
  return { secret, prefix, endsAt };
}

/** Makes a link as a person. The secret is in the answer, in the letter where one was asked for, and nowhere else. */
export async function makeLink(options: {
  actor: Actor;
  ensembleId: string;
  number: number;
  link: NewLink;
}): Promise<MadeLink> {
  const grant = await accessEdition(options.actor, "share", options.ensembleId, options.number);
  return makeLinkFor(grant, newLinkSchema.parse(options.link));
}
