import { answerCall } from "~/routes/api/answer-call.server";
import { editionNumber, sendDoubles } from "~/routes/share/share-call.server";
import { loadEditionPositions } from "~/services/editions/load-edition.server";

export const loader = answerCall({
  async GET({ actor, params }) {
    const number = editionNumber(params.number);
    return sendDoubles(await loadEditionPositions({ actor, ensembleId: params.id ?? "", number }));
  },
});
export const action = loader;
