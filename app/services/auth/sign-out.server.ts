import { inTransaction } from "../../db/client.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import type { Actor } from "./access.server.ts";
import { endSession } from "./end-session.server.ts";

/** Ends the session of whoever is signed in; nothing to do for others. */
export async function signOut(actor: Actor, address: string): Promise<void> {
  if (actor.kind !== "user") return;
  await inTransaction(async (tx) => {
    await endSession(actor.sessionId, tx);
    const by = { userId: actor.userId, tokenId: null, origin: address };
    await writeEntry(tx, { teamId: null }, by, { type: "sign-out", data: {} });
  });
}
