import { openSharedFile } from "~/services/links/load-shared.server";
import { sendDownload, sharedCall } from "./share-call.server";

export const loader = sharedCall(async ({ secret, address, takes, params }) =>
  sendDownload(await openSharedFile({ secret, address, takes, name: params.name ?? "" })),
);
