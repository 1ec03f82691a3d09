import { eq } from "drizzle-orm";
import { beforeEach, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { apiTokens, members, sessions, teams, throttles, users } from "~/db/schema.server";
import { findToken } from "~/services/auth/find-token.server";
import { signIn } from "~/services/auth/sign-in.server";
import { takeAttempt } from "~/services/auth/throttle.server";
import { closeDemoAccounts, seedPeople } from "~/services/teams/seed-people.server";
import { signedIn, tokenOf } from "../factories/people";

const caller = { address: "192.0.2.1", userAgent: null };
const enter = (email: string, password: string) =>
  signIn({ email, password, stay: false, caller }).then(
    () => "in",
    (error: { code?: string }) => error.code,
  );

beforeEach(() => db.delete(throttles));

describe("the demo people", () => {
  const PASSWORD = "abcd-efgh-jkmn-pqrs";

  it("are made once, with their roles in their two teams", async () => {
    await seedPeople(PASSWORD);
    await seedPeople(PASSWORD);
    const rows = await db
      .select({ email: users.email, role: members.role, team: teams.name, demo: users.demo })
      .from(users)
      .innerJoin(members, eq(members.userId, users.id))
      .innerJoin(teams, eq(teams.id, members.teamId))
      .where(eq(users.demo, true));
    expect(rows.toSorted((a, b) => a.email.localeCompare(b.email))).toEqual([
      { email: "analyst@lowlying.example", role: "analyst", team: "Estuary", demo: true },
      { email: "outsider@lowlying.example", role: "owner", team: "Headland", demo: true },
      { email: "owner@lowlying.example", role: "owner", team: "Estuary", demo: true },
      { email: "reader@lowlying.example", role: "reader", team: "Estuary", demo: true },
    ]);
    expect(await db.$count(teams, eq(teams.demo, true))).toBe(2);
    expect(await enter("analyst@lowlying.example", PASSWORD)).toBe("in");
  });

  it("get back the password that the start prints", async () => {
    await seedPeople(PASSWORD);
    await seedPeople("another-printed-one");
    expect(await enter("reader@lowlying.example", "another-printed-one")).toBe("in");
    expect(await enter("reader@lowlying.example", PASSWORD)).toBe("invalid");
    await seedPeople(PASSWORD);
    expect(await enter("reader@lowlying.example", PASSWORD)).toBe("in");
  });

  it("are shut with all they hold where strangers could come, and open again on loopback (A09)", async () => {
    await seedPeople(PASSWORD);
    const [analyst] = await db.select().from(users).where(eq(users.email, "analyst@lowlying.example"));
    const [team] = await db.select().from(teams).where(eq(teams.name, "Estuary"));
    const userId = analyst?.id ?? "";
    await signedIn(userId);
    const token = await tokenOf(userId, team?.id ?? "");
    await closeDemoAccounts();
    expect(await enter("analyst@lowlying.example", PASSWORD)).toBe("invalid");
    expect(await db.$count(sessions, eq(sessions.userId, userId))).toBe(0);
    expect(await findToken(token)).toBeNull();
    await seedPeople(PASSWORD);
    expect(await enter("analyst@lowlying.example", PASSWORD)).toBe("in");
    expect(await db.$count(apiTokens, eq(apiTokens.userId, userId))).toBe(1);
    expect(await findToken(token)).toBeNull();
  });
});

describe("attempts", () => {
  const throttle = { kind: "test", subject: "s", limit: 3, seconds: 60 };
  const begun = new Date("2026-03-01T00:00:00Z");
  const later = (seconds: number) => new Date(begun.getTime() + seconds * 1000);

  it("are let through up to the limit, then rest from the last one", async () => {
    expect(await takeAttempt(throttle, begun)).toBeNull();
    expect(await takeAttempt(throttle, later(20))).toBeNull();
    expect(await takeAttempt(throttle, later(50))).toBeNull();
    expect(await takeAttempt(throttle, later(51))).toBe(59);
    // Knocking while it rests makes it no longer.
    expect(await takeAttempt(throttle, later(100))).toBe(10);
    expect(await takeAttempt(throttle, later(110))).toBeNull();
  });

  it("spread over time never rest", async () => {
    for (let n = 0; n < 6; n++) expect(await takeAttempt(throttle, later(n * 61))).toBeNull();
  });

  it("of different subjects count apart", async () => {
    for (let n = 0; n < 3; n++) await takeAttempt(throttle, begun);
    expect(await takeAttempt({ ...throttle, subject: "t" }, begun)).toBeNull();
  });
});
