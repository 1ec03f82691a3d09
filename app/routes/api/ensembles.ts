import { type EnsembleAnswer, ensembleListQuerySchema, type Warnings } from "~/lib/api/schemas";
import { hasSteeringCharacters, quoteFound } from "~/lib/text/escape";
import type { Actor } from "~/services/auth/access.server";
import { accessTeam } from "~/services/auth/access.server";
import { describeEnsemble } from "~/services/ensembles/describe-ensemble.server";
import { listForApi } from "~/services/ensembles/list-for-api.server";
import { openForm } from "~/services/ensembles/read-multipart.server";
import { takeIn } from "~/services/ensembles/take-in.server";
import { notFound } from "~/services/http.server";
import { answerCall, json, readQuery } from "./answer-call.server";

/** A token acts in its one team. */
function teamOf(actor: Actor): string {
  if (actor.kind !== "token") throw notFound();
  return actor.teamId;
}

/** The ensemble as every call gives it, and what of this request was not taken up. */
function withWarnings(ensemble: EnsembleAnswer, warnings: Warnings): EnsembleAnswer {
  return warnings.length === 0 ? ensemble : { ...ensemble, warnings };
}

/** A name is kept as it was sent; what of it steers a screen is told (row G13). */
function steeringName(name: string): Warnings {
  if (!hasSteeringCharacters(name)) return [];
  const message = `The name holds control or text-direction characters, here written out: ${quoteFound(name)}`;
  return [{ code: "G13", message }];
}

const answer = answerCall({
  async GET({ actor, url }) {
    const { teamId } = await accessTeam(actor, "read", teamOf(actor));
    return json(await listForApi({ actor, teamId, ...readQuery(url, ensembleListQuerySchema) }));
  },
  async POST({ actor, request }) {
    const { teamId } = await accessTeam(actor, "take-in", teamOf(actor));
    const form = openForm({ body: request.body, contentType: request.headers.get("content-type") });
    const { ensembleId, created, warnings = [] } = await takeIn({ actor, form });
    const ensemble = await describeEnsemble(teamId, ensembleId);
    return json(withWarnings(ensemble, [...warnings, ...steeringName(ensemble.name)]), {
      status: created ? 201 : 200,
      location: `/api/v1/ensembles/${ensembleId}`,
    });
  },
});

export const loader = answer;
export const action = answer;
