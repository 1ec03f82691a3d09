import { and, asc, eq, isNull, lte } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { mailQueue } from "../../db/schema.server.ts";
import { log } from "../log.server.ts";
import type { Letter } from "./queue-mail.server.ts";
import { deliver } from "./transport.server.ts";

/** Waits after each failure, in minutes; after the last the letter is given up. */
const WAITS_MINUTES = [1, 5, 15, 60, 180, 720];
const LOOK_EVERY_MS = 2_000;

interface Claimed extends Letter {
  id: string;
  attempts: number;
}

/**
 * Takes the next letter that is due and puts its next try behind the wait that a failure would mean: another process
 * leaves it alone, and a crash in the middle costs a wait, not the letter.
 */
async function claim(now: Date): Promise<Claimed | null> {
  return inTransaction(
    async (tx) => {
      const rows = await tx
        .select()
        .from(mailQueue)
        .where(and(isNull(mailQueue.sentAt), isNull(mailQueue.failedAt), lte(mailQueue.nextTryAt, now)))
        .orderBy(asc(mailQueue.nextTryAt))
        .limit(1)
        .for("update", { skipLocked: true });
      const row = rows[0];
      if (row === undefined) return null;
      const attempts = row.attempts + 1;
      const wait = WAITS_MINUTES[Math.min(attempts, WAITS_MINUTES.length) - 1] ?? 1;
      const nextTryAt = new Date(now.getTime() + wait * 60_000);
      await tx.update(mailQueue).set({ attempts, nextTryAt }).where(eq(mailQueue.id, row.id));
      return { id: row.id, recipient: row.recipient, subject: row.subject, body: row.body, attempts };
    },
    { isolation: "read committed" },
  );
}

/** The text goes once it is sent or given up: links with secrets stand in it. */
const emptied = { body: "" };

async function sendOne(letter: Claimed): Promise<void> {
  try {
    await deliver(letter.id, letter);
    await db
      .update(mailQueue)
      .set({ ...emptied, sentAt: new Date() })
      .where(eq(mailQueue.id, letter.id));
  } catch (error) {
    const last = letter.attempts > WAITS_MINUTES.length - 1;
    log.warn({ err: error, mailId: letter.id, attempts: letter.attempts, givenUp: last }, "mail not sent");
    if (!last) return;
    await db
      .update(mailQueue)
      .set({ ...emptied, failedAt: new Date() })
      .where(eq(mailQueue.id, letter.id));
  }
}

/**
 * Sends whatever is due.
 *
 * @returns how many letters were tried
 */
export async function sendDueMail(now = new Date()): Promise<number> {
  let tried = 0;
  for (let letter = await claim(now); letter !== null; letter = await claim(now)) {
    await sendOne(letter);
    tried += 1;
  }
  return tried;
}

const kept = globalThis as typeof globalThis & {
  lowlyingMail?: { timer: NodeJS.Timeout; busy: Promise<void> };
};

/** Looks for mail every two seconds until `stopMail`. */
export function startMail(): void {
  if (kept.lowlyingMail) clearInterval(kept.lowlyingMail.timer);
  let running = false;
  const state = {
    busy: Promise.resolve(),
    timer: setInterval(() => {
      if (running) return;
      running = true;
      state.busy = sendDueMail()
        .then(
          () => {},
          // The database may be away; the next look tries again.
          (error) => log.debug({ err: error }, "mail queue not read"),
        )
        .finally(() => {
          running = false;
        });
    }, LOOK_EVERY_MS),
  };
  state.timer.unref();
  kept.lowlyingMail = state;
}

/** Stops looking and waits for the letter that is on its way. */
export async function stopMail(): Promise<void> {
  const state = kept.lowlyingMail;
  if (state === undefined) return;
  clearInterval(state.timer);
  kept.lowlyingMail = undefined;
  await state.busy;
}
