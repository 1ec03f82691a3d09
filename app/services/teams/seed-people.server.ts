import { and, eq, isNull } from "drizzle-orm";
import { db, inTransaction, type Transaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { apiTokens, members, sessions, teams, users } from "../../db/schema.server.ts";
import type { MemberRole } from "../auth/access.server.ts";
import { hashPassword, verifyPassword } from "../auth/hash-password.server.ts";

/** Invented people, on addresses of a name that can never be registered. */
const PEOPLE: readonly { email: string; name: string; team: string; role: MemberRole }[] = [
  { email: "owner@lowlying.example", name: "Demo owner", team: "Estuary", role: "owner" },
  { email: "analyst@lowlying.example", name: "Demo analyst", team: "Estuary", role: "analyst" },
  { email: "reader@lowlying.example", name: "Demo reader", team: "Estuary", role: "reader" },
  { email: "outsider@lowlying.example", name: "Demo outsider", team: "Headland", role: "owner" },
];

async function demoTeam(tx: Transaction, name: string, createdAt: Date): Promise<string> {
  const rows = await tx
    .select({ id: teams.id })
    .from(teams)
    .where(and(eq(teams.name, name), eq(teams.demo, true)))
    .for("update");
  if (rows[0]) return rows[0].id;
  const id = newId();
  await tx.insert(teams).values({ id, name, demo: true, createdAt });
  return id;
}

/**
 * Makes the demo people and their two teams, or brings them back to the given password: what `npm start` prints must
 * be true. Nothing of a team's work is touched.
 */
export async function seedPeople(password: string, now = new Date()): Promise<void> {
  const passwordHash = await hashPassword(password);
  for (const { email, name, team, role } of PEOPLE) {
    await inTransaction(async (tx) => {
      const teamId = await demoTeam(tx, team, now);
      const rows = await tx.select().from(users).where(eq(users.email, email)).for("update");
      const known = rows[0];
      if (known === undefined) {
        const id = newId();
        const account = { id, email, name, passwordHash, demo: true, createdAt: now, confirmedAt: now };
        await tx.insert(users).values(account);
        await tx.insert(members).values({ teamId, userId: id, role, createdAt: now });
        return;
      }
      const same = (await verifyPassword(known.passwordHash, password)).right;
      if (same && known.disabledAt === null) return;
      const hash = same ? {} : { passwordHash };
      await tx
        .update(users)
        .set({ ...hash, disabledAt: null })
        .where(eq(users.id, known.id));
    });
  }
}

/**
 * Shuts the demo accounts where strangers could use them: a database that was once used on loopback may hold them.
 */
export async function closeDemoAccounts(now = new Date()): Promise<void> {
  const open = await db
    .select({ id: users.id })
    .from(users)
    .where(and(eq(users.demo, true), isNull(users.disabledAt)));
  for (const { id } of open) {
    await inTransaction(async (tx) => {
      await tx.update(users).set({ disabledAt: now }).where(eq(users.id, id));
      await tx.delete(sessions).where(eq(sessions.userId, id));
      await tx
        .update(apiTokens)
        .set({ revokedAt: now })
        .where(and(eq(apiTokens.userId, id), isNull(apiTokens.revokedAt)));
    });
  }
}
