import { z } from "zod";
import { db } from "../../db/client.server.ts";
import { type Actor, accessEnsemble, accessTeam } from "../auth/access.server.ts";
import { writeEntry } from "./write-entry.server.ts";

export const remarkSchema = z
  .string()
  .trim()
  .min(1, "Write the remark first.")
  .max(2000, "A remark has up to 2,000 characters.");

/** Writes a remark on an ensemble under the person's name: every member may, and nobody can change it. */
export async function writeRemark(options: {
  actor: Actor;
  ensembleId: string;
  text: string;
}): Promise<void> {
  const grant = await accessEnsemble(options.actor, "remark", options.ensembleId);
  await writeEntry(db, grant, grant, { type: "remark", data: { text: remarkSchema.parse(options.text) } });
}

/** Writes a remark into the logbook of the team. */
export async function writeTeamRemark(options: {
  actor: Actor;
  teamId: string;
  text: string;
}): Promise<void> {
  const grant = await accessTeam(options.actor, "remark", options.teamId);
  await writeEntry(db, grant, grant, { type: "remark", data: { text: remarkSchema.parse(options.text) } });
}
