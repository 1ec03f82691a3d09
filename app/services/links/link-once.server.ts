import { setTimeout as pause } from "node:timers/promises";
import { and, asc, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { isId } from "../../db/new-id.server.ts";
import { columns, editions, ensembles, links, teams } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { STANDARD_TEMPERATURE_K } from "../../lib/units.ts";
import { onCommandLine } from "../command-line.server.ts";
import { freezeFor } from "../editions/freeze-edition.server.ts";
import { workerBundleExists } from "../jobs/pool.server.ts";
import { startJobs } from "../jobs/run-jobs.server.ts";
import { shutDownJobs } from "../jobs/shutdown.server.ts";
import { askForSift } from "../sifts/create-sift.server.ts";
import { chooseSift, type FoundSift, findSift, findSiftsOf } from "../sifts/find-sift.server.ts";
import { endLinkFor } from "./end-link.server.ts";
import { isLinkSecret, linkSha } from "./link-secret.ts";
import { makeLinkFor, needDays } from "./make-link.server.ts";

const LOOK_MS = 250;
/** A running instance takes a job within a heartbeat; after that this process does it itself. */
const OTHERS_FIRST_MS = 6_000;
const PATIENCE_MS = 30 * 60_000;

/** The product itself: whoever can already read the database stands at the command line. */
const NOBODY = { userId: null, tokenId: null };

async function findTarget(ensembleId: string) {
  const rows = isId(ensembleId)
    ? await db
        .select({
          ensembleId: ensembles.id,
          teamId: ensembles.teamId,
          team: teams.name,
          linkDays: teams.linkDays,
        })
        .from(ensembles)
        .innerJoin(teams, eq(teams.id, ensembles.teamId))
        .where(and(eq(ensembles.id, ensembleId), isNull(ensembles.deletedAt)))
        .limit(1)
    : [];
  const row = rows[0];
  if (row === undefined) {
    throw new DomainError("not-found", "No such ensemble", `No ensemble has the id ${ensembleId}.`);
  }
  return row;
}

/** Waits for a sift; where nobody takes it within some seconds, this process computes it. */
async function waitFor(siftId: string): Promise<FoundSift> {
  const started = Date.now();
  let own = false;
  try {
    for (;;) {
      const sift = await findSift(siftId);
      if (sift.status !== "queued" && sift.status !== "running") return sift;
      const waited = Date.now() - started;
      if (waited > PATIENCE_MS) {
        throw new DomainError(
          "unavailable",
          "Not done",
          "The sift takes more than half an hour; try again later.",
        );
      }
      if (!own && sift.status === "queued" && waited > OTHERS_FIRST_MS && workerBundleExists()) {
        own = true;
        await startJobs();
      }
      await pause(LOOK_MS);
    }
  } finally {
    if (own) await shutDownJobs();
  }
}

/** The sift that stands for the ensemble; the default one is run where none is done on its frames as they are. */
async function doneSift(at: { teamId: string; ensembleId: string }): Promise<FoundSift> {
  const known = chooseSift(await findSiftsOf([at.ensembleId]));
  if (known?.status === "done" && known.current) return known;
  const levels = await db
    .select({ id: columns.id })
    .from(columns)
    .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.kind, "energy")))
    .orderBy(asc(columns.ordinal))
    .limit(1);
  const asked = await askForSift({ ...at, ...NOBODY }, { level: levels[0]?.id ?? null }, { automatic: true });
  const sift = await waitFor(asked.id);
  if (sift.status === "done") return sift;
  throw new DomainError("conflict", "No distinct set", sift.error ?? "The sift was cancelled. Try again.");
}

/**
 * Freezes an edition of an ensemble and makes a link to it, for the command `npm run link`.
 *
 * @param options.days until it ends; 0 makes one that has ended
 * @returns the secret of the link
 */
export async function linkOnce(options: {
  ensembleId: string;
  days: number;
  label: string;
  contact: string | null;
  sources: boolean;
  logbook: boolean;
}): Promise<string> {
  return onCommandLine(async () => {
    const { linkDays, ...at } = await findTarget(options.ensembleId);
    // Said before an edition is frozen for nothing.
    needDays(options.days, linkDays);
    const sift = await doneSift(at);
    const edition = await freezeFor(
      { ...at, ...NOBODY },
      {
        sift: sift.id,
        temperature: STANDARD_TEMPERATURE_K,
        weights: "auto",
        title: "",
        remark: "",
      },
    );
    const { secret } = await makeLinkFor(
      { ...at, ...NOBODY, editionId: edition.id },
      {
        label: options.label,
        contact: options.contact ?? `the team ${at.team}`.slice(0, 200),
        days: options.days,
        sources: options.sources,
        logbook: options.logbook,
      },
    );
    return secret;
  });
}

/**
 * Ends the link of an address, for the command `npm run link -- --end ADDRESS`.
 *
 * @param address the whole address, its path, or the secret alone
 * @returns true; false where it had ended before
 */
export async function endOnce(address: string): Promise<boolean> {
  return onCommandLine(async () => {
    const secret = /([a-z2-7]{32})\/?$/.exec(address.trim())?.[1] ?? "";
    const rows = isLinkSecret(secret)
      ? await db
          .select({
            linkId: links.id,
            teamId: links.teamId,
            ensembleId: editions.ensembleId,
            revokedAt: links.revokedAt,
            endsAt: links.endsAt,
          })
          .from(links)
          .innerJoin(editions, eq(editions.id, links.editionId))
          .where(eq(links.secretSha, linkSha(secret)))
          .limit(1)
      : [];
    const row = rows[0];
    if (row === undefined) {
      throw new DomainError("not-found", "No such link", "No link of this database has that address.");
    }
    if (row.revokedAt !== null || row.endsAt <= new Date()) return false;
    await endLinkFor({ ...row, ...NOBODY });
    return true;
  });
}
