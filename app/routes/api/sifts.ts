import type { Warnings } from "~/lib/api/schemas";
import { type SiftRequest, siftRequestSchema } from "~/lib/recipe/recipe";
import { accessEnsemble } from "~/services/auth/access.server";
import { createSift } from "~/services/sifts/create-sift.server";
import { answerCall, json, readJson } from "./answer-call.server";

/** A sift in file order compares no energies: a tolerance for them is not used, and the recipe has null there. */
function unusedOptions({ level, energyTolerance }: SiftRequest): Warnings {
  if (level !== null || energyTolerance === undefined || energyTolerance === null) return [];
  const message = `energyTolerance ${energyTolerance} is not used: without a level there are no energies to compare.`;
  return [{ code: "energy-tolerance-unused", message }];
}

const answer = answerCall({
  async POST({ actor, params, request, url }) {
    const { ensembleId } = await accessEnsemble(actor, "compute", params.id ?? "");
    const asked = await readJson(request, siftRequestSchema);
    const sift = await createSift({ actor, ensembleId, request: asked });
    const base = url.pathname.startsWith("/files/") ? "/files" : "/api/v1";
    return json(
      { ...sift, warnings: [...unusedOptions(asked), ...sift.warnings] },
      { status: 202, location: `${base}/sifts/${sift.id}` },
    );
  },
});

export const loader = answer;
export const action = answer;
