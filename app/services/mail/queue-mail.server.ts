import { db, type Queryable } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { mailQueue } from "../../db/schema.server.ts";

/** Plain text; the sender makes an HTML part of it. No names of compounds or files, in subject or body. */
export interface Letter {
  recipient: string;
  subject: string;
  body: string;
}

/** Puts a letter into the queue, in the transaction of the act that it tells of. The sender finds it within seconds. */
export async function queueMail(letter: Letter, on: Queryable = db): Promise<void> {
  const now = new Date();
  await on.insert(mailQueue).values({ id: newId(), ...letter, nextTryAt: now, createdAt: now });
}
