import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { members, teams, users } from "~/db/schema.server";
import { writeSessionCookie } from "~/middleware/session-cookie.server";
import type { MemberRole } from "~/services/auth/access.server";
import { hashPassword } from "~/services/auth/hash-password.server";
import { makeToken } from "~/services/auth/make-token.server";
import { startSession } from "~/services/auth/start-session.server";

export const PASSWORD = "seven brown kettles sing";

/** A user of no team. */
export async function makeUser(options: { email?: string; name?: string; password?: string } = {}) {
  const id = newId();
  const email = options.email ?? `${id}@lab.example`;
  const passwordHash = await hashPassword(options.password ?? PASSWORD);
  await db
    .insert(users)
    .values({ id, email, name: options.name ?? "A person", passwordHash, createdAt: new Date() });
  return { id, email };
}

export async function makeTeam(name = "A team") {
  const id = newId();
  await db.insert(teams).values({ id, name, createdAt: new Date() });
  return { id, name };
}

export async function join(teamId: string, userId: string, role: MemberRole): Promise<void> {
  await db.insert(members).values({ teamId, userId, role, createdAt: new Date() });
}

/** A new user with a role in a team, signed in. `cookie` is what their browser sends. */
export async function makeMember(teamId: string, role: MemberRole) {
  const user = await makeUser();
  await join(teamId, user.id, role);
  return { ...user, cookie: await signedIn(user.id) };
}

/** Cookie header of a new session. */
export async function signedIn(userId: string): Promise<string> {
  const secret = await startSession({ userId, stay: false, userAgent: null });
  return (await writeSessionCookie({ secret, stay: false })).split(";", 1)[0] ?? "";
}

/** A bearer token of a user in a team. */
export async function tokenOf(userId: string, teamId: string, scope: "full" | "read" | "add" = "full") {
  return (await makeToken({ userId, teamId, scope, name: "test", days: 1 })).token;
}
