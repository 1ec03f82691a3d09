import { and, eq } from "drizzle-orm";
import { db } from "~/db/client.server";
import { columns } from "~/db/schema.server";
import type { Actor } from "~/services/auth/access.server";
import { freezeEdition } from "~/services/editions/freeze-edition.server";
import { makeLink, type NewLink } from "~/services/links/make-link.server";
import { type makeLab, reference, sifted, takenIn } from "./upload";

export const CONTACT = "Ask Robin of the modelling group";

/** A person of a lab as the services know them. */
export const personOf = (userId: string): Actor => ({ kind: "user", userId, sessionId: "x" });

/** An ensemble with a finished sift, ready to be frozen. */
export async function makeSifted(lab: Awaited<ReturnType<typeof makeLab>>, name = "ac-ala.xyz") {
  const file = { name, content: reference("ensembles/ac-ala-nhme.xyz") };
  const taken = await takenIn(lab.token, [file], { level: "MMFF94", energyUnit: "kcal/mol" });
  const sift = await sifted(lab.token, taken.id, { level: "MMFF94" });
  return { ensembleId: taken.id, siftId: sift.id, level: taken.levels[0]?.id ?? "" };
}

export function freeze(
  actor: Actor,
  at: { ensembleId: string; siftId: string },
  more: { title?: string; remark?: string; temperature?: number } = {},
) {
  return freezeEdition({
    actor,
    ensembleId: at.ensembleId,
    request: { sift: at.siftId, temperature: 298.15, weights: "auto", title: "", remark: "", ...more },
  });
}

export async function link(
  actor: Actor,
  at: { ensembleId: string; number: number },
  more: Partial<NewLink> = {},
) {
  const { ensembleId, number } = at;
  const asked = { label: "Partner", contact: CONTACT, days: 14, sources: false, logbook: false, ...more };
  return makeLink({ actor, ensembleId, number, link: asked });
}

/** Takes a column away, as replacing it does. */
export async function replaceColumn(ensembleId: string, columnId: string): Promise<void> {
  await db
    .update(columns)
    .set({ data: Buffer.alloc(8), dataSha: Buffer.alloc(32) })
    .where(and(eq(columns.ensembleId, ensembleId), eq(columns.id, columnId)));
}
