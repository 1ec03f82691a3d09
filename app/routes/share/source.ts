import { openSharedSource } from "~/services/links/load-shared.server";
import { sendDownload, sharedCall } from "./share-call.server";

export const loader = sharedCall(async ({ secret, address, takes, params }) => {
  const position = /^\d{1,6}$/.test(params.position ?? "") ? Number(params.position) : -1;
  return sendDownload(await openSharedSource({ secret, address, takes, position }));
});
