import { decisionRequestSchema } from "~/lib/api/schemas";
import type { FrameState } from "~/lib/intake/report";
import { type Actor, accessEnsemble } from "~/services/auth/access.server";
import { describeIntake } from "~/services/ensembles/describe-ensemble.server";
import { notFound } from "~/services/http.server";
import { answerCall, json, readJson } from "./answer-call.server";

type Decide = (decision: {
  actor: Actor;
  ensembleId: string;
  frame: number;
  reason: string;
}) => Promise<FrameState>;

/** Holding and releasing differ in what they do, not in how they are asked for. */
export function decideCall(decide: Decide) {
  return answerCall({
    async POST({ actor, params, request }) {
      const { teamId, ensembleId } = await accessEnsemble(actor, "compute", params.id ?? "");
      if (!/^[1-9]\d{0,8}$/.test(params.frame ?? "")) throw notFound();
      const frame = Number(params.frame);
      const { reason } = await readJson(request, decisionRequestSchema);
      const state = await decide({ actor, ensembleId, frame, reason });
      return json({ frame, state, intake: await describeIntake(teamId, ensembleId) });
    },
  });
}
