import argon2 from "argon2";
import { eq } from "drizzle-orm";
import { afterEach, beforeEach, describe, expect, it, vi } from "vitest";
import { db } from "~/db/client.server";
import {
  logbook,
  mailQueue,
  mailTokens,
  members,
  sessions,
  teams,
  throttles,
  users,
} from "~/db/schema.server";
import * as environment from "~/env.server";
import { findSession } from "~/services/auth/find-session.server";
import { newSecret, secretSha } from "~/services/auth/secret.server";
import { startSession } from "~/services/auth/start-session.server";
import { sweepEnded } from "~/services/auth/sweep.server";
import { settleBackground } from "~/services/background.server";
import { makeMember, makeTeam, makeUser, PASSWORD, signedIn } from "../factories/people";
import { call, cookieOf } from "../setup/app";

/** What a page says in its alert. */
async function alertOf(answer: Response): Promise<string | undefined> {
  return /role="alert".*?<\/div>/s.exec(await answer.text())?.[0];
}

const signIn = (email: string, password: string, options: { address?: string; cookie?: string } = {}) =>
  call("/login", { form: { email, password }, ...options });

function withEnv(change: Partial<environment.Env>): void {
  const real = environment.env();
  // why: settings are read once a process; a test of another setting must not leak into the next.
  vi.spyOn(environment, "env").mockReturnValue({ ...real, ...change });
}

beforeEach(() => db.delete(throttles));
afterEach(settleBackground);

describe("signing in", () => {
  it("opens a session with the right password and leads to the teams", async () => {
    const user = await makeUser();
    const answer = await signIn(user.email, PASSWORD);
    expect(answer.status).toBe(303);
    expect(answer.headers.get("location")).toBe("/teams");
    const cookie = cookieOf(answer);
    expect((await call("/login", { cookie: cookie ?? "" })).status).toBe(302);
    const rows = await db.select().from(logbook).where(eq(logbook.userId, user.id));
    expect(rows.map((row) => row.type)).toEqual(["sign-in"]);
  });

  it("takes the address in any case and with blanks around it", async () => {
    const user = await makeUser({ email: "mixed.case@lab.example" });
    expect((await signIn(`  ${user.email.toUpperCase()} `, PASSWORD)).status).toBe(303);
  });

  it("leads back to the page that was wanted, and nowhere else (B07)", async () => {
    const user = await makeUser();
    const go = async (to: string) => {
      const form = { email: user.email, password: PASSWORD };
      const answer = await call(`/login?to=${encodeURIComponent(to)}`, { form });
      return answer.headers.get("location");
    };
    expect(await go("/teams/abc?sort=name")).toBe("/teams/abc?sort=name");
    for (const evil of ["//evil.example", "/\\evil.example", "https://evil.example", "/%2fevil.example"]) {
      expect(await go(evil)).toBe("/teams");
    }
  });

  it("says the same of a wrong password and of an unknown address (A03)", async () => {
    const user = await makeUser();
    const wrong = await signIn(user.email, "another one entirely");
    const unknown = await signIn("nobody@lab.example", "another one entirely");
    expect([wrong.status, unknown.status]).toEqual([422, 422]);
    expect([cookieOf(wrong), cookieOf(unknown)]).toEqual([null, null]);
    const said = await alertOf(wrong);
    expect(said).toContain("do not belong together");
    expect(await alertOf(unknown)).toBe(said);
  });

  it("hashes as much for an unknown address as for a known one (A03)", async () => {
    const user = await makeUser();
    await signIn("nobody@lab.example", "a first one, for the stand-in hash");
    const verify = vi.spyOn(argon2, "verify");
    await signIn(user.email, "another one entirely");
    await signIn("nobody@lab.example", "another one entirely");
    const parameters = verify.mock.calls.map(([hash]) => /\$m=.*?\$/.exec(String(hash))?.[0]);
    expect(parameters).toHaveLength(2);
    expect(parameters[0]).toBe(parameters[1]);
  });

  it("never shows the password again", async () => {
    const answer = await signIn("nobody@lab.example", "MARKER of a password");
    const page = await answer.text();
    expect(page).toContain("nobody@lab.example");
    expect(page).not.toContain("MARKER");
  });

  it("keeps hashes of argon2id with 19,456 KiB, 2 passes and 1 lane, and renews weaker ones (A01)", async () => {
    const user = await makeUser();
    const hashOf = async () =>
      (await db.select({ hash: users.passwordHash }).from(users).where(eq(users.id, user.id)))[0]?.hash;
    expect(await hashOf()).toContain("$argon2id$v=19$m=1024,t=2,p=1$");
    withEnv({ ARGON2_MEMORY_KIB: 19_456 });
    expect((await signIn(user.email, PASSWORD)).status).toBe(303);
    expect(await hashOf()).toContain("$argon2id$v=19$m=19456,t=2,p=1$");
    expect((await signIn(user.email, PASSWORD)).status).toBe(303);
  });

  it("lets nobody in whose account is disabled, and ends open sessions at once (A05)", async () => {
    const user = await makeUser();
    const cookie = await signedIn(user.id);
    await db.update(users).set({ disabledAt: new Date() }).where(eq(users.id, user.id));
    expect((await signIn(user.email, PASSWORD)).status).toBe(422);
    expect((await call("/teams", { cookie })).headers.get("location")).toContain("/login");
  });

  it("knows no demo account in production (A09)", async () => {
    const user = await makeUser();
    await db.update(users).set({ demo: true }).where(eq(users.id, user.id));
    withEnv({ public: true });
    expect((await signIn(user.email, PASSWORD)).status).toBe(422);
  });
});

describe("wrong passwords", () => {
  const WRONG = "another one entirely";

  it("rest the account for that range after ten, for its owner elsewhere nothing changes (A04)", async () => {
    const user = await makeUser();
    for (let tries = 0; tries < 10; tries++) {
      expect((await signIn(user.email, WRONG, { address: "192.0.2.5" })).status).toBe(422);
    }
    const resting = await signIn(user.email, PASSWORD, { address: "192.0.2.77" });
    expect(resting.status).toBe(429);
    expect(Number(resting.headers.get("retry-after"))).toBeGreaterThan(800);
    expect(Number(resting.headers.get("retry-after"))).toBeLessThanOrEqual(900);
    expect(await alertOf(resting)).toContain("15 minutes");
    expect((await signIn(user.email, PASSWORD, { address: "198.51.100.5" })).status).toBe(303);
  });

  it("rest an unknown address just so", async () => {
    for (let tries = 0; tries < 10; tries++) await signIn("nobody@lab.example", WRONG);
    expect((await signIn("nobody@lab.example", WRONG)).status).toBe(429);
  });

  it("are counted when they come all at once (A04)", async () => {
    const user = await makeUser();
    const answers = await Promise.all(Array.from({ length: 16 }, () => signIn(user.email, WRONG)));
    const statuses = answers.map((answer) => answer.status).sort();
    expect(statuses.filter((status) => status === 422)).toHaveLength(10);
    expect(statuses.filter((status) => status === 429)).toHaveLength(6);
  });

  it("are forgotten after a right one", async () => {
    const user = await makeUser();
    for (let tries = 0; tries < 9; tries++) await signIn(user.email, WRONG);
    expect((await signIn(user.email, PASSWORD)).status).toBe(303);
    for (let tries = 0; tries < 9; tries++) expect((await signIn(user.email, WRONG)).status).toBe(422);
  });

  it("may be tried again after fifteen minutes", async () => {
    const user = await makeUser();
    for (let tries = 0; tries < 10; tries++) await signIn(user.email, WRONG);
    await db.update(throttles).set({ windowStart: new Date(Date.now() - 901_000) });
    expect((await signIn(user.email, PASSWORD)).status).toBe(303);
  });

  it("leave no address of anybody in the counters", async () => {
    await signIn("nobody@lab.example", WRONG);
    const rows = await db.select({ name: throttles.name }).from(throttles);
    expect(rows.length).toBeGreaterThan(0);
    expect(JSON.stringify(rows)).not.toMatch(/nobody|192\.0\.2/);
  });
});

describe("sessions", () => {
  it("keep only the SHA-256 of their secret (A05)", async () => {
    const user = await makeUser();
    const secret = await startSession({ userId: user.id, stay: false, userAgent: null });
    expect(Buffer.from(secret, "base64url")).toHaveLength(32);
    const [row] = await db.select().from(sessions).where(eq(sessions.userId, user.id));
    expect(row?.tokenSha.equals(secretSha(secret))).toBe(true);
    expect(JSON.stringify(row)).not.toContain(secret);
  });

  it("send a cookie for scripts' eyes closed, bound to the site and gone with the browser (A06)", async () => {
    const user = await makeUser();
    const [line = ""] = (await signIn(user.email, PASSWORD)).headers.getSetCookie();
    expect(line).toMatch(/^lowlying-3000=/);
    expect(line).toContain("HttpOnly");
    expect(line).toContain("SameSite=Lax");
    expect(line).toContain("Path=/");
    expect(line).not.toMatch(/Max-Age|Expires|Domain/);
  });

  it("stay for 30 days where that was ticked", async () => {
    const user = await makeUser();
    const answer = await call("/login", { form: { email: user.email, password: PASSWORD, stay: "1" } });
    expect(answer.headers.getSetCookie()[0]).toContain("Max-Age=2592000");
  });

  it("end after 12 hours without use (A06)", async () => {
    const user = await makeUser();
    const begun = new Date("2026-03-01T08:00:00Z");
    const secret = await startSession({ userId: user.id, stay: false, userAgent: null, now: begun });
    const later = (hours: number) => new Date(begun.getTime() + hours * 3_600_000);
    expect(await findSession(secret, later(11.9))).not.toBeNull();
    // Used then, so counted from there.
    expect(await findSession(secret, later(23.8))).not.toBeNull();
    expect(await findSession(secret, later(23.8 + 12.1))).toBeNull();
  });

  it("end after 30 days, used or not, stayed or not (A06)", async () => {
    const user = await makeUser();
    const begun = new Date("2026-03-01T08:00:00Z");
    const later = (days: number) => new Date(begun.getTime() + days * 86_400_000);
    const secret = await startSession({ userId: user.id, stay: true, userAgent: null, now: begun });
    expect(await findSession(secret, later(29.9))).not.toBeNull();
    expect(await findSession(secret, later(30.1))).toBeNull();
  });

  it("are unknown for a secret that was never given, or a cookie that we did not sign", async () => {
    expect(await findSession(newSecret())).toBeNull();
    const user = await makeUser();
    const cookie = await signedIn(user.id);
    const forged = `${cookie.slice(0, -4)}AAAA`;
    expect((await call("/teams", { cookie: forged })).headers.get("location")).toContain("/login");
  });

  it("get a new secret at every sign-in, and the old one ends (A05)", async () => {
    const user = await makeUser();
    const first = cookieOf(await signIn(user.email, PASSWORD)) ?? "";
    const second = cookieOf(await signIn(user.email, PASSWORD, { cookie: first })) ?? "";
    expect(second).not.toBe(first);
    expect((await call("/login", { cookie: first })).status).toBe(200);
    expect((await call("/login", { cookie: second })).status).toBe(302);
  });

  it("end at sign-out, which a link cannot do (A05, B08)", async () => {
    const user = await makeUser();
    const cookie = await signedIn(user.id);
    expect((await call("/logout", { cookie })).status).toBe(404);
    expect((await call("/login", { cookie })).status).toBe(302);
    const out = await call("/logout", { cookie, method: "POST" });
    expect(out.status).toBe(303);
    expect(out.headers.getSetCookie()[0]).toContain("Max-Age=0");
    expect(out.headers.get("clear-site-data")).toBe('"storage"');
    expect((await call("/login", { cookie })).status).toBe(200);
    expect(await db.select().from(sessions).where(eq(sessions.userId, user.id))).toEqual([]);
  });

  it("are swept once they have ended", async () => {
    const user = await makeUser();
    await startSession({ userId: user.id, stay: false, userAgent: null, now: new Date("2026-01-01") });
    await startSession({ userId: user.id, stay: false, userAgent: null, now: new Date("2026-03-01") });
    await sweepEnded(new Date("2026-03-02"));
    expect(await db.select().from(sessions).where(eq(sessions.userId, user.id))).toHaveLength(1);
  });
});

describe("signing up", () => {
  const person = { name: "Ada Quist", email: "Ada@Lab.example", password: PASSWORD };

  it("is closed unless the switch opens it", async () => {
    const before = await db.$count(users);
    expect((await call("/sign-up", { form: person })).status).toBe(403);
    expect(await (await call("/sign-up")).text()).toContain("by invitation");
    expect(await db.$count(users)).toBe(before);
  });

  it("makes a team of one's own, which its owner then signs in to", async () => {
    withEnv({ OPEN_SIGN_UP: true });
    const answer = await call("/sign-up", { form: person });
    expect([answer.status, answer.headers.get("location")]).toEqual([303, "/login?signed-up"]);
    const [row] = await db
      .select({ email: users.email, role: members.role, team: teams.id })
      .from(users)
      .innerJoin(members, eq(members.userId, users.id))
      .innerJoin(teams, eq(teams.id, members.teamId))
      .where(eq(users.email, "ada@lab.example"));
    expect(row).toMatchObject({ role: "owner" });
    expect(await (await call("/login?signed-up")).text()).toContain("Your account is open");
    const signedIn = await call("/login", { form: { email: person.email, password: person.password } });
    expect(signedIn.status).toBe(303);
    expect((await call("/login", { cookie: cookieOf(signedIn) ?? "" })).status).toBe(302);
  });

  it("answers a known address as a new one, and tells its owner alone (A03)", async () => {
    withEnv({ OPEN_SIGN_UP: true });
    const user = await makeUser();
    const told = async (email: string) => {
      const answer = await call("/sign-up", { form: { ...person, email } });
      const own = ["x-request-id", "content-security-policy", "date"];
      const headers = [...answer.headers]
        .filter(([name]) => !own.includes(name))
        // The address that was typed goes back to who typed it, whichever it is.
        .map(([name, value]) => [name, value.replace(/^(typed-address-\d+)=[^;]+/, "$1")]);
      return { status: answer.status, headers, body: await answer.text() };
    };
    expect(await told(user.email)).toEqual(await told("nobody.yet@lab.example"));
    await settleBackground();
    const letters = await db.select().from(mailQueue).where(eq(mailQueue.recipient, user.email));
    expect(letters).toHaveLength(1);
    expect(await db.$count(users, eq(users.email, user.email))).toBe(1);
    expect((await call("/login", { form: { email: user.email, password: "not the old one" } })).status).toBe(
      422,
    );
  });

  it("names each field at fault and keeps what was typed, but for the password", async () => {
    withEnv({ OPEN_SIGN_UP: true });
    const answer = await call("/sign-up", { form: { name: " ", email: "no address", password: "MARKER" } });
    expect(answer.status).toBe(422);
    const page = await answer.text();
    for (const words of ["as the logbook shows it", "This is no mail address", "6 characters. At least 12"]) {
      expect(page).toContain(words);
    }
    expect(page).toContain('value="no address"');
    expect(page).not.toContain("MARKER");
  });

  it("sets no role, flag or id that a form slips in (C04)", async () => {
    withEnv({ OPEN_SIGN_UP: true });
    const email = "eve@lab.example";
    await call("/sign-up", { form: { ...person, email, demo: "1", id: "aaaaaaaaaaaaaaaa", role: "reader" } });
    const [row] = await db.select().from(users).where(eq(users.email, email));
    expect(row?.demo).toBe(false);
    expect(row?.id).not.toBe("aaaaaaaaaaaaaaaa");
  });
});

describe("a forgotten password", () => {
  async function linkFor(email: string): Promise<string> {
    await db.delete(mailQueue).where(eq(mailQueue.recipient, email));
    await call("/reset-password", { form: { email } });
    await settleBackground();
    const letters = await db.select().from(mailQueue).where(eq(mailQueue.recipient, email));
    const path = letters
      .map(({ body }) => /http:\/\/127\.0\.0\.1:3000(\/reset-password\/\S+)/.exec(body)?.[1])
      .findLast((found) => found !== undefined);
    return path ?? "";
  }
  const NEW = "nine grey herons stand";

  it("gets the same answer for every address (A03)", async () => {
    const user = await makeUser();
    const page = async (email: string) => {
      const answer = await call("/reset-password", { form: { email } });
      const text = await answer.text();
      return `${answer.status} ${/role="status".*?<\/section>/s.exec(text)?.[0]}`;
    };
    const known = await page(user.email);
    expect(known).toContain("200");
    expect(known).toContain("Sent, if the address is known");
    expect(await page("nobody@lab.example")).toBe(known);
    await settleBackground();
    expect(await db.$count(mailQueue, eq(mailQueue.recipient, "nobody@lab.example"))).toBe(0);
  });

  it("is changed by the mailed link once, and every session ends (A05, A08)", async () => {
    const user = await makeUser();
    const cookie = await signedIn(user.id);
    const link = await linkFor(user.email);
    expect(link).toMatch(/^\/reset-password\/[A-Za-z0-9_-]{43}$/);
    // Looking at it uses nothing up.
    expect((await call(link)).status).toBe(200);
    expect((await call(link)).status).toBe(200);
    const changed = await call(link, { form: { password: NEW } });
    expect(changed.status).toBe(303);
    expect(changed.headers.get("location")).toBe("/login?changed=1");
    expect((await call("/login", { cookie })).status).toBe(200);
    expect((await signIn(user.email, PASSWORD)).status).toBe(422);
    expect((await signIn(user.email, NEW)).status).toBe(303);
    expect((await call(link)).status).toBe(404);
    expect((await call(link, { form: { password: PASSWORD } })).status).toBe(404);
    const letters = await db.select().from(mailQueue).where(eq(mailQueue.recipient, user.email));
    expect(letters.map((letter) => letter.subject)).toContain("Your Lowlying password was changed");
  });

  it("is changed once when the link is sent twice at the same moment", async () => {
    const user = await makeUser();
    const link = await linkFor(user.email);
    const send = () => call(link, { form: { password: NEW } });
    const statuses = (await Promise.all([send(), send()])).map((answer) => answer.status).sort();
    expect(statuses).toEqual([303, 404]);
  });

  it("keeps its link while the new password will not do", async () => {
    const user = await makeUser();
    const link = await linkFor(user.email);
    const refused = await call(link, { form: { password: "too short" } });
    expect(refused.status).toBe(422);
    expect(await refused.text()).toContain("At least 12");
    expect((await call(link, { form: { password: NEW } })).status).toBe(303);
  });

  it("has a link for 30 minutes, and only the newest counts (A08)", async () => {
    const user = await makeUser();
    const old = await linkFor(user.email);
    const link = await linkFor(user.email);
    expect(link).not.toBe(old);
    expect((await call(old)).status).toBe(404);
    const [row] = await db.select().from(mailTokens).where(eq(mailTokens.userId, user.id));
    const minutes = ((row?.endsAt.getTime() ?? 0) - (row?.createdAt.getTime() ?? 0)) / 60_000;
    expect(minutes).toBe(30);
    await db
      .update(mailTokens)
      .set({ endsAt: new Date(Date.now() - 1000) })
      .where(eq(mailTokens.userId, user.id));
    expect((await call(link)).status).toBe(404);
    expect((await call(link, { form: { password: NEW } })).status).toBe(404);
  });

  it("leaves no secret in the database but its hash, once the letter is sent (A08)", async () => {
    const user = await makeUser();
    const secret = (await linkFor(user.email)).split("/").at(-1) ?? "";
    const [row] = await db.select().from(mailTokens).where(eq(mailTokens.userId, user.id));
    expect(row?.tokenSha.equals(secretSha(secret))).toBe(true);
  });

  it("sends at most five letters an hour to an address, with the same answer", async () => {
    const user = await makeUser();
    for (let tries = 0; tries < 8; tries++) {
      expect((await call("/reset-password", { form: { email: user.email } })).status).toBe(200);
      await settleBackground();
    }
    expect(await db.$count(mailQueue, eq(mailQueue.recipient, user.email))).toBe(5);
  });
});

describe("a team's pages", () => {
  it("send strangers to the sign-in page and back", async () => {
    const team = await makeTeam();
    const answer = await call(`/teams/${team.id}?sort=name`);
    expect(answer.status).toBe(302);
    expect(answer.headers.get("location")).toBe(
      `/login?to=${encodeURIComponent(`/teams/${team.id}?sort=name`)}`,
    );
  });

  it("show who is signed in", async () => {
    const team = await makeTeam();
    const member = await makeMember(team.id, "reader");
    const answer = await call("/teams", { cookie: member.cookie });
    expect(answer.headers.get("location")).toBe(`/teams/${team.id}`);
  });
});
