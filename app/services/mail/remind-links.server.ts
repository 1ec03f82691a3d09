import { and, eq, gt, isNull, lt } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { links, users } from "../../db/schema.server.ts";
import { queueMail } from "./queue-mail.server.ts";

const DAY_MS = 86_400_000;
const DAYS_BEFORE = 3;

/** Tells whoever made a read-only link that it ends within three days; once, and never of one shorter than that. */
export async function remindOfLinks(now = new Date()): Promise<number> {
  const soon = new Date(now.getTime() + DAYS_BEFORE * DAY_MS);
  const rows = await db
    .select({ id: links.id, endsAt: links.endsAt, createdAt: links.createdAt, email: users.email })
    .from(links)
    .innerJoin(
      users,
      and(eq(users.id, links.createdBy), isNull(users.disabledAt), eq(users.linkLetters, true)),
    )
    .where(
      and(isNull(links.revokedAt), isNull(links.remindedAt), gt(links.endsAt, now), lt(links.endsAt, soon)),
    );
  let told = 0;
  for (const row of rows) {
    if (row.endsAt.getTime() - row.createdAt.getTime() <= DAYS_BEFORE * DAY_MS) continue;
    await inTransaction(async (tx) => {
      const [done] = await tx
        .update(links)
        .set({ remindedAt: now })
        .where(and(eq(links.id, row.id), isNull(links.remindedAt)));
      if (done.affectedRows === 0) return;
      const day = row.endsAt.toISOString().slice(0, 10);
      const body = `A read-only link that you made ends on ${day}. Whoever holds it reads then that it has ended, and whom to ask.\n\nA new link to the same edition can be made on its Hand-over page.`;
      await queueMail({ recipient: row.email, subject: "Your Lowlying link ends in three days", body }, tx);
      told += 1;
    });
  }
  return told;
}
