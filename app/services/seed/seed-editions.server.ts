import { and, asc, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { editions, ensembles, members, teams, users } from "../../db/schema.server.ts";
import { STANDARD_TEMPERATURE_K } from "../../lib/units.ts";
import { freezeFor } from "../editions/freeze-edition.server.ts";
import { waitForJob } from "../jobs/wait-for-job.server.ts";
import { chooseSift, findSiftsOf } from "../sifts/find-sift.server.ts";

const PATIENCE_MS = 10 * 60_000;

/** Ensembles of the demo team that come with an edition, by their names, and what stands on it. */
const FROZEN: Readonly<Record<string, { title: string; remark: string }>> = {
  "N-Acetyl-L-alanine N-methylamide": {
    title: "First look",
    remark: "For the discussion of the folded shape.",
  },
  "2-(Dimethylamino)ethyl 4-butoxybenzoate": {
    title: "Before the better level",
    remark: "Shapes to compute again are the populated ones; see what is open.",
  },
};

interface Target {
  teamId: string;
  ensembleId: string;
  userId: string;
  name: string;
}

/** Ensembles of the demo team that are to have an edition and have none. */
async function findTargets(names: readonly string[]): Promise<Target[]> {
  const rows = await db
    .select({ teamId: teams.id, ensembleId: ensembles.id, userId: users.id, name: ensembles.name })
    .from(ensembles)
    .innerJoin(teams, and(eq(teams.id, ensembles.teamId), eq(teams.demo, true)))
    .innerJoin(members, eq(members.teamId, teams.id))
    .innerJoin(users, and(eq(users.id, members.userId), eq(users.email, "analyst@lowlying.example")))
    .leftJoin(editions, eq(editions.ensembleId, ensembles.id))
    .where(and(isNull(ensembles.deletedAt), isNull(editions.id)))
    .orderBy(asc(ensembles.createdAt));
  return rows.filter(({ name }) => names.includes(name));
}

/** The first sift of an ensemble once it is done; null where it does not come about. */
async function doneSift(ensembleId: string): Promise<string | null> {
  const asked = chooseSift(await findSiftsOf([ensembleId]));
  if (asked === null) return null;
  await waitForJob(asked.jobId, PATIENCE_MS);
  const sift = chooseSift(await findSiftsOf([ensembleId]));
  return sift?.status === "done" && sift.current ? sift.id : null;
}

/**
 * Freezes the editions of the demo, once each, as soon as their sifts are done: by this version, in its words.
 *
 * @param names of ensembles; all that come with an edition where left out
 */
export async function seedEditions(names: readonly string[] = Object.keys(FROZEN)): Promise<void> {
  for (const { name, ...at } of await findTargets(names)) {
    const sift = await doneSift(at.ensembleId);
    const words = FROZEN[name];
    if (sift === null || words === undefined) continue;
    await freezeFor(
      { ...at, tokenId: null },
      { sift, temperature: STANDARD_TEMPERATURE_K, weights: "auto", ...words },
    );
  }
}
