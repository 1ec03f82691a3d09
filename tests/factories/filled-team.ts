import { eq } from "drizzle-orm";
import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { apiTokens, columns, invitations, links, outsideStructures, plans, series } from "~/db/schema.server";
import { invite } from "~/services/people/invite.server";
import { call } from "../setup/app";
import { freeze, link, personOf } from "./editions";
import { makeMember, makeTeam, tokenOf } from "./people";
import { BUTANE, formOf, frame, sifted, takenIn } from "./upload";

/** Butane, another shape of it, and one frame of another molecule, which is held. */
export function threeFrames(label = "a"): string {
  const bent = BUTANE.map((line, k) => (k === 3 ? "C 1.9480 0.1280 0.0600" : line));
  const broken = frame(`name=${label}3 energy=-1.2`, ["O 0 0 0", "H 0.96 0 0", "H -0.24 0.93 0"]);
  return frame(`name=${label}1 energy=-1.5`) + frame(`name=${label}2 energy=-1.25`, bent) + broken;
}

/**
 * A team that holds one of everything: people of each role with browsers and tokens, an ensemble with a question-free
 * intake, a held frame, levels, columns, a sift, a pair matrix, an outside structure, a plan, an edition, a link, an
 * invitation. Wants a running job runner (`withJobs`).
 */
export async function fillTeam(name = "Estuary") {
  const team = await makeTeam(name);
  const [owner, analyst, reader] = await Promise.all([
    makeMember(team.id, "owner"),
    makeMember(team.id, "analyst"),
    makeMember(team.id, "reader"),
  ]);
  const token = await tokenOf(analyst.id, team.id);
  const taken = await takenIn(token, [{ name: "butane.xyz", content: threeFrames() }], {
    level: "A",
    energyUnit: "kcal/mol",
  });
  const table = "frame,B [kcal/mol],dipole [D]\n1,-2.5,0.1\n2,-2.0,0.2\n";
  const added = await call(`/api/v1/ensembles/${taken.id}/columns`, {
    ...{ method: "POST", token, body: formOf([{ name: "b.csv", content: table }]) },
  });
  if (added.status !== 201) throw new Error(await added.text());
  const sift = await sifted(token, taken.id, { level: "A", energyTolerance: null, rmsdTolerance: 0.001 });
  const asked = await call(`/files/sifts/${sift.id}/pair-matrix`, {
    ...{ method: "POST", cookie: analyst.cookie, body: "{}" },
    headers: { "content-type": "application/json" },
  });
  if (asked.status !== 202) throw new Error(await asked.text());
  const matrix: { id: string } = await asked.json();
  await call(`/files/matrices/${matrix.id}?wait=30`, { cookie: analyst.cookie });
  const outside = await call(`/ensembles/${taken.id}/compare`, {
    ...{ method: "POST", cookie: analyst.cookie },
    body: formOf([{ name: "pose.xyz", content: frame("pose") }], { name: "A pose", level: "none" }),
  });
  if (outside.status !== 200) throw new Error(await outside.text());
  const actor = personOf(analyst.id);
  const { number } = await freeze(actor, { ensembleId: taken.id, siftId: sift.id });
  const made = await link(actor, { ensembleId: taken.id, number }, { sources: true, logbook: true });
  await invite({
    ...{ actor: personOf(owner.id), teamId: team.id },
    ...{ email: `guest-${team.id}@lab.example`, role: "reader" },
  });
  const planId = newId();
  const now = new Date();
  const plan = { version: 1, plans: [] } as never;
  await db.insert(plans).values({
    ...{ id: planId, ensembleId: taken.id, name: "First", plan, createdBy: analyst.id },
    ...{ createdAt: now, changedAt: now },
  });
  const idIn = async (rows: Promise<{ id: string }[]>) => (await rows)[0]?.id ?? "";
  return {
    team,
    people: { owner, analyst, reader },
    tokens: {
      full: token,
      owner: await tokenOf(owner.id, team.id),
      reader: await tokenOf(reader.id, team.id),
      read: await tokenOf(analyst.id, team.id, "read"),
      add: await tokenOf(analyst.id, team.id, "add"),
    },
    ids: {
      team: team.id,
      ensemble: taken.id,
      sift: sift.id,
      matrix: matrix.id,
      plan: planId,
      number: String(number),
      secret: made.secret,
      column: await idIn(db.select({ id: columns.id }).from(columns).where(eq(columns.ensembleId, taken.id))),
      outside: await idIn(
        db
          .select({ id: outsideStructures.id })
          .from(outsideStructures)
          .where(eq(outsideStructures.ensembleId, taken.id)),
      ),
      series: await idIn(db.select({ id: series.id }).from(series).where(eq(series.teamId, team.id))),
      link: await idIn(db.select({ id: links.id }).from(links).where(eq(links.teamId, team.id))),
      invitation: await idIn(
        db.select({ id: invitations.id }).from(invitations).where(eq(invitations.teamId, team.id)),
      ),
      token: await idIn(
        db.select({ id: apiTokens.id }).from(apiTokens).where(eq(apiTokens.userId, owner.id)),
      ),
    },
  };
}

export type FilledTeam = Awaited<ReturnType<typeof fillTeam>>;
