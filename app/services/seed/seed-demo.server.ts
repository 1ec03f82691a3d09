import { createHash } from "node:crypto";
import { readFile } from "node:fs/promises";
import path from "node:path";
import { and, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { ensembles, members, sources, teams, users } from "../../db/schema.server.ts";
import type { Grant } from "../auth/access.server.ts";
import { openForm } from "../ensembles/read-multipart.server.ts";
import { filesSha } from "../ensembles/same-files.server.ts";
import { takeInFor } from "../ensembles/take-in.server.ts";

/** Invented scenario around real molecules; where the files came from stands in fixtures/. */
interface DemoFile {
  path: string;
  name: string;
  series: string;
  energyFrom?: string;
  /** Anybody may look at it. */
  example?: boolean;
}

const SERIES = { peptides: "Dipeptide models", linkers: "Linkers" } as const;

const DEMO: readonly DemoFile[] = [
  {
    path: "fixtures/reference/ensembles/difluoroethane.xyz",
    name: "1,2-Difluoroethane",
    series: SERIES.linkers,
  },
  {
    path: "fixtures/reference/ensembles/aminoester.xyz",
    name: "2-(Dimethylamino)ethyl 4-butoxybenzoate",
    series: SERIES.linkers,
  },
  {
    path: "fixtures/reference/ensembles/aryl-ether.xyz",
    name: "4-tert-Butylphenyl 4-(trifluoromethyl)phenyl ether",
    series: SERIES.linkers,
  },
  {
    path: "fixtures/demo/ac-ala-nhme-night-run.xyz",
    name: "N-Acetyl-L-alanine N-methylamide, night run",
    series: SERIES.peptides,
  },
  {
    path: "fixtures/reference/ensembles/ac-ala-nhme.xyz",
    name: "N-Acetyl-L-alanine N-methylamide",
    series: SERIES.peptides,
    example: true,
  },
];

async function isKnown(teamId: string, sha: Buffer): Promise<boolean> {
  const rows = await db
    .select({ id: sources.id })
    .from(sources)
    .where(and(eq(sources.teamId, teamId), eq(sources.sha256, sha)))
    .limit(1);
  return rows.length > 0;
}

/** Takes one file in like anybody's upload; one that was here before, deleted since or not, is left alone. */
async function seedFile(grant: Grant, file: DemoFile): Promise<void> {
  const content = await readFile(path.resolve(file.path));
  const sha = createHash("sha256").update(content).digest();
  if (!(await isKnown(grant.teamId, sha))) {
    const form = new FormData();
    const fields = { name: file.name, series: file.series, level: "MMFF94", energyUnit: "kcal/mol" };
    for (const [name, value] of Object.entries(fields)) form.append(name, value);
    form.append("file", new Blob([content]), path.basename(file.path));
    const sent = new Response(form);
    await takeInFor({
      grantOf: async () => grant,
      form: openForm({ body: sent.body, contentType: sent.headers.get("content-type") }),
      interactive: false,
    });
  }
  if (file.example !== true) return;
  await db
    .update(ensembles)
    .set({ example: true })
    .where(and(eq(ensembles.teamId, grant.teamId), eq(ensembles.filesSha, filesSha([sha]))));
}

const grantIn = (teamId: string, userId: string | null): Grant => ({
  teamId,
  role: "owner",
  userId,
  tokenId: null,
  onlyOwnOfToken: null,
});

/** Ensembles of the demo team, once each; the people are there before. */
export async function seedDemo(): Promise<void> {
  const rows = await db
    .select({ teamId: members.teamId, userId: members.userId })
    .from(members)
    .innerJoin(users, eq(users.id, members.userId))
    .innerJoin(teams, eq(teams.id, members.teamId))
    .where(and(eq(users.email, "analyst@lowlying.example"), eq(teams.demo, true)))
    .limit(1);
  const analyst = rows[0];
  if (analyst === undefined) return;
  for (const file of DEMO) await seedFile(grantIn(analyst.teamId, analyst.userId), file);
}

const EXAMPLE_TEAM = "Lowlying example";

async function exampleTeam(): Promise<string> {
  const rows = await db
    .select({ id: teams.id })
    .from(teams)
    .where(and(eq(teams.name, EXAMPLE_TEAM), eq(teams.demo, true)))
    .limit(1);
  if (rows[0]) return rows[0].id;
  const id = newId();
  await db.insert(teams).values({ id, name: EXAMPLE_TEAM, demo: true, createdAt: new Date() });
  return id;
}

/** The live example alone, in a team that nobody is in: what a public server shows. */
export async function seedExample(): Promise<void> {
  const there = await db
    .select({ id: ensembles.id })
    .from(ensembles)
    .where(and(eq(ensembles.example, true), isNull(ensembles.deletedAt)))
    .limit(1);
  if (there.length > 0) return;
  const grant = grantIn(await exampleTeam(), null);
  for (const file of DEMO) if (file.example === true) await seedFile(grant, file);
}
