import { answerCall } from "~/routes/api/answer-call.server";
import { editionNumber, sendDownload } from "~/routes/share/share-call.server";
import { exportEdition } from "~/services/editions/open-edition-file.server";

export const loader = answerCall({
  async GET({ actor, params }) {
    const number = editionNumber(params.number);
    const file = await exportEdition({ actor, ensembleId: params.id ?? "", number, name: params.name ?? "" });
    return sendDownload(file);
  },
});
export const action = loader;
