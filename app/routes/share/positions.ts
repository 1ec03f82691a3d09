import { loadSharedPositions } from "~/services/links/load-shared.server";
import { sendDoubles, sharedCall } from "./share-call.server";

export const loader = sharedCall(async ({ secret, address }) =>
  sendDoubles(await loadSharedPositions({ secret, address })),
);
