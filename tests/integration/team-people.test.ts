import { and, eq } from "drizzle-orm";
import { beforeEach, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import {
  apiTokens,
  editionFiles,
  editions,
  ensembles,
  invitations,
  links,
  logbook,
  mailQueue,
  mailTokens,
  members,
  sessions,
  teams,
  throttles,
  users,
  verifications,
} from "~/db/schema.server";
import { askNewAddress, confirmAddress, findAddressChange } from "~/services/account/change-address.server";
import { changePassword } from "~/services/account/change-password.server";
import { deleteAccount, restoreAccount } from "~/services/account/delete-account.server";
import { chooseLetters, loadAccount } from "~/services/account/load-account.server";
import { endOwnSessions, listSessions } from "~/services/account/sessions.server";
import type { Actor } from "~/services/auth/access.server";
import { accessTeam } from "~/services/auth/access.server";
import { findSession } from "~/services/auth/find-session.server";
import { findToken } from "~/services/auth/find-token.server";
import { signIn } from "~/services/auth/sign-in.server";
import { startSession } from "~/services/auth/start-session.server";
import { remindOfLinks } from "~/services/mail/remind-links.server";
import { findInvitation, joinByPassword, joinSignedIn } from "~/services/people/accept-invitation.server";
import { changeRole } from "~/services/people/change-role.server";
import { makeFirstOwner } from "~/services/people/first-owner.server";
import { invite, withdrawInvitation } from "~/services/people/invite.server";
import { listPeople } from "~/services/people/list-people.server";
import { removeMember } from "~/services/people/remove-member.server";
import { purgeDeleted } from "~/services/purge.server";
import { deleteTeam, restoreTeam } from "~/services/teams/delete-team.server";
import { join, makeMember, makeTeam, makeUser, PASSWORD, tokenOf } from "../factories/people";
import { makeEnsembleRow } from "../factories/rows";

const caller = { address: "192.0.2.7", userAgent: "Mozilla/5.0 (X11; Linux x86_64) Firefox/140.0" };
const DAY_MS = 86_400_000;

/** What an act came to: "done", or the code of its refusal. */
const outcome = (act: Promise<unknown>) =>
  act.then(
    () => "done",
    (error: { code?: string }) => error.code,
  );

async function person(teamId: string, role: "owner" | "analyst" | "reader") {
  const user = await makeUser();
  await join(teamId, user.id, role);
  const secret = await startSession({ userId: user.id, stay: false, userAgent: caller.userAgent });
  const found = await findSession(secret);
  const actor: Actor = { kind: "user", userId: user.id, sessionId: found?.sessionId ?? "" };
  return { ...user, actor, secret };
}

/** The letters of an address, oldest first. */
const lettersTo = (email: string) =>
  db.select().from(mailQueue).where(eq(mailQueue.recipient, email)).orderBy(mailQueue.createdAt);

async function secretTo(email: string, path: string): Promise<string> {
  const letters = await lettersTo(email);
  const found = new RegExp(`/${path}/([\\w-]{43})`).exec(letters.at(-1)?.body ?? "");
  return found?.[1] ?? "";
}

beforeEach(() => db.delete(throttles));

describe("roles", () => {
  it("count from the next request on, tokens included (C05, D08)", async () => {
    const team = await makeTeam();
    const owner = await person(team.id, "owner");
    const analyst = await person(team.id, "analyst");
    const token = await findToken(await tokenOf(analyst.id, team.id));
    expect(await outcome(accessTeam(analyst.actor, "compute", team.id))).toBe("done");
    await changeRole({ actor: owner.actor, teamId: team.id, userId: analyst.id, role: "reader" });
    expect(await outcome(accessTeam(analyst.actor, "compute", team.id))).toBe("forbidden");
    expect(token).not.toBeNull();
    if (token) expect(await outcome(accessTeam(token, "compute", team.id))).toBe("forbidden");
    expect((await lettersTo(analyst.email)).map(({ subject }) => subject)).toEqual([
      "Your role in the team A team on Lowlying",
    ]);
  });

  it("are an owner's alone to give, and never a token's", async () => {
    const team = await makeTeam();
    const owner = await person(team.id, "owner");
    const analyst = await person(team.id, "analyst");
    const token = await findToken(await tokenOf(owner.id, team.id));
    const rise = (actor: Actor) =>
      outcome(changeRole({ actor, teamId: team.id, userId: analyst.id, role: "owner" }));
    expect(await rise(analyst.actor)).toBe("forbidden");
    expect(await rise(token as Actor)).toBe("forbidden");
    expect(await rise({ kind: "anonymous" })).toBe("not-found");
  });

  it("never leave a team without an owner, not even by two requests at once (C06)", async () => {
    for (let round = 0; round < 5; round++) {
      const team = await makeTeam();
      const one = await person(team.id, "owner");
      const two = await person(team.id, "owner");
      const acts = await Promise.all([
        outcome(changeRole({ actor: one.actor, teamId: team.id, userId: two.id, role: "reader" })),
        outcome(removeMember({ actor: two.actor, teamId: team.id, userId: one.id })),
        outcome(removeMember({ actor: two.actor, teamId: team.id, userId: two.id })),
      ]);
      expect(acts).toContain("done");
      const owners = await db.$count(members, and(eq(members.teamId, team.id), eq(members.role, "owner")));
      expect(owners).toBe(1);
    }
  });

  it("the last owner can neither leave nor become less", async () => {
    const team = await makeTeam();
    const owner = await person(team.id, "owner");
    const of = { actor: owner.actor, teamId: team.id, userId: owner.id };
    expect(await outcome(removeMember(of))).toBe("conflict");
    expect(await outcome(changeRole({ ...of, role: "analyst" }))).toBe("conflict");
    expect(await outcome(deleteAccount({ actor: owner.actor, password: PASSWORD, caller }))).toBe("conflict");
  });
});

describe("leaving a team", () => {
  it("ends access and tokens at once, and they stay ended", async () => {
    const team = await makeTeam();
    const owner = await person(team.id, "owner");
    const reader = await person(team.id, "reader");
    const token = await tokenOf(reader.id, team.id);
    await removeMember({ actor: owner.actor, teamId: team.id, userId: reader.id });
    expect(await outcome(accessTeam(reader.actor, "read", team.id))).toBe("not-found");
    expect(await findToken(token)).toBeNull();
    await join(team.id, reader.id, "reader");
    expect(await findToken(token)).toBeNull();
  });

  it("is free for everybody else, and others cannot remove", async () => {
    const team = await makeTeam();
    await person(team.id, "owner");
    const analyst = await person(team.id, "analyst");
    const reader = await person(team.id, "reader");
    expect(await outcome(removeMember({ actor: analyst.actor, teamId: team.id, userId: reader.id }))).toBe(
      "forbidden",
    );
    expect(await outcome(removeMember({ actor: reader.actor, teamId: team.id, userId: reader.id }))).toBe(
      "done",
    );
    const entries = await db.select().from(logbook).where(eq(logbook.teamId, team.id));
    expect(entries.map(({ type }) => type)).toEqual(["person-left"]);
  });
});

describe("invitations", () => {
  it("make an account and a member once, by the address they were sent to", async () => {
    const team = await makeTeam("Quay");
    const owner = await person(team.id, "owner");
    const email = `${newId()}@lab.example`;
    await invite({ actor: owner.actor, teamId: team.id, email, role: "analyst" });
    const secret = await secretTo(email, "invitation");
    expect(await findInvitation(secret)).toMatchObject({ team: "Quay", role: "analyst", known: false });
    const joined = await joinByPassword({ secret, name: "New hand", password: PASSWORD, caller });
    expect(joined.teamId).toBe(team.id);
    expect(await findSession(joined.session)).not.toBeNull();
    expect(await findInvitation(secret)).toBeNull();
    expect(await outcome(joinByPassword({ secret, name: "Again", password: PASSWORD, caller }))).toBe(
      "not-found",
    );
    const people = await listPeople({ actor: owner.actor, teamId: team.id });
    expect(people.members.map(({ name, role }) => [name, role])).toContainEqual(["New hand", "analyst"]);
    expect(people.invitations).toEqual([]);
  });

  it("are stored as checksums and name no compound", async () => {
    const team = await makeTeam();
    const owner = await person(team.id, "owner");
    const email = `${newId()}@lab.example`;
    await invite({ actor: owner.actor, teamId: team.id, email, role: "reader" });
    const secret = await secretTo(email, "invitation");
    const [row] = await db.select().from(invitations).where(eq(invitations.email, email));
    expect(row?.tokenSha).toHaveLength(32);
    expect(JSON.stringify(row)).not.toContain(secret);
  });

  it("lead nowhere once withdrawn, replaced or over", async () => {
    const team = await makeTeam();
    const owner = await person(team.id, "owner");
    const email = `${newId()}@lab.example`;
    await invite({ actor: owner.actor, teamId: team.id, email, role: "reader" });
    const first = await secretTo(email, "invitation");
    await invite({ actor: owner.actor, teamId: team.id, email, role: "analyst" });
    expect(await findInvitation(first)).toBeNull();
    const [waiting] = (await listPeople({ actor: owner.actor, teamId: team.id })).invitations;
    await withdrawInvitation({ actor: owner.actor, teamId: team.id, invitationId: waiting?.id ?? "" });
    expect(await findInvitation(await secretTo(email, "invitation"))).toBeNull();
    const old = new Date(Date.now() - 8 * DAY_MS);
    await invite({ actor: owner.actor, teamId: team.id, email, role: "reader", now: old });
    expect(await findInvitation(await secretTo(email, "invitation"))).toBeNull();
  });

  it("of a known address ask for its password, and of another account refuse", async () => {
    const team = await makeTeam();
    const owner = await person(team.id, "owner");
    const known = await makeUser();
    const other = await makeUser();
    await invite({ actor: owner.actor, teamId: team.id, email: known.email, role: "reader" });
    const secret = await secretTo(known.email, "invitation");
    const wrong = joinByPassword({ secret, name: "", password: "not the password at all", caller });
    expect(await outcome(wrong)).toBe("invalid");
    const foreign: Actor = { kind: "user", userId: other.id, sessionId: newId() };
    expect(await outcome(joinSignedIn({ actor: foreign, secret, caller }))).toBe("forbidden");
    expect(await outcome(joinByPassword({ secret, name: "", password: PASSWORD, caller }))).toBe("done");
    const again = invite({ actor: owner.actor, teamId: team.id, email: known.email, role: "owner" });
    expect(await outcome(again)).toBe("conflict");
  });
});

describe("the first owner", () => {
  it("comes in by a one-time link of the command line (A09)", async () => {
    const email = `${newId()}@lab.example`;
    const first = await makeFirstOwner({ email, team: "Harbour" });
    const { secret, renewed } = await makeFirstOwner({ email, team: "Harbour" });
    expect([first.renewed, renewed]).toEqual([false, true]);
    expect(await findInvitation(first.secret)).toBeNull();
    expect(await db.$count(teams, eq(teams.name, "Harbour"))).toBe(1);
    const { teamId } = await joinByPassword({ secret, name: "First", password: PASSWORD, caller });
    const rows = await db.select().from(members).where(eq(members.teamId, teamId));
    expect(rows.map(({ role }) => role)).toEqual(["owner"]);
    expect(await findInvitation(secret)).toBeNull();
    expect(await outcome(makeFirstOwner({ email, team: "Harbour" }))).toBe("conflict");
    expect(await outcome(makeFirstOwner({ email: "none", team: "Harbour" }))).toBe("invalid");
  });
});

describe("an account", () => {
  it("shows its sessions and ends them, own ones alone (A07)", async () => {
    const team = await makeTeam();
    const one = await person(team.id, "owner");
    const foreign = await person(team.id, "reader");
    await startSession({ userId: one.id, stay: true, userAgent: "curl/8.1" });
    const listed = await listSessions({ actor: one.actor });
    expect(listed).toHaveLength(2);
    expect(listed.find(({ here }) => here)?.browser).toBe("Firefox, Linux");
    const [theirs] = await listSessions({ actor: foreign.actor });
    expect(await outcome(endOwnSessions({ actor: one.actor, sessionId: theirs?.id ?? "" }))).toBe(
      "not-found",
    );
    expect(await endOwnSessions({ actor: one.actor, sessionId: null })).toBe(1);
    expect(await listSessions({ actor: one.actor })).toHaveLength(1);
  });

  it("changes its password with the old one, and ends other sessions (A05, A07)", async () => {
    const team = await makeTeam();
    const one = await person(team.id, "owner");
    const other = await startSession({ userId: one.id, stay: false, userAgent: null });
    const change = (current: string, password: string) =>
      outcome(changePassword({ actor: one.actor, current, password, caller }));
    expect(await change("wrong password here", "a brand new sentence")).toBe("invalid");
    expect(await change(PASSWORD, "short")).toBe("invalid");
    expect(await change(PASSWORD, "a brand new sentence")).toBe("done");
    expect(await findSession(other)).toBeNull();
    expect(await findSession(one.secret)).not.toBeNull();
    expect((await lettersTo(one.email)).at(-1)?.subject).toBe("Your Lowlying password was changed");
  });

  it("changes its address only by a letter to the new one, and tells the old one (A07, A08)", async () => {
    const team = await makeTeam();
    const one = await person(team.id, "owner");
    const email = `${newId()}@lab.example`;
    await askNewAddress({ actor: one.actor, email, password: PASSWORD, caller });
    expect((await loadAccount(one.actor)).email).toBe(one.email);
    expect((await lettersTo(one.email)).at(-1)?.subject).toBe("Your Lowlying address is to change");
    const secret = await secretTo(email, "confirm-address");
    expect(await findAddressChange(secret)).toBe(email);
    await confirmAddress({ secret, caller });
    expect((await loadAccount(one.actor)).email).toBe(email);
    expect(await outcome(confirmAddress({ secret, caller }))).toBe("not-found");
    expect((await lettersTo(one.email)).at(-1)?.subject).toBe("Your Lowlying address was changed");
  });

  it("does not tell whether the wished address has an account (A03)", async () => {
    const team = await makeTeam();
    const one = await person(team.id, "owner");
    const taken = await makeUser();
    const ask = askNewAddress({ actor: one.actor, email: taken.email, password: PASSWORD, caller });
    expect(await outcome(ask)).toBe("done");
    expect(await lettersTo(taken.email)).toEqual([]);
  });

  it("closes, comes back by the letter within 30 days, and is gone after them (G06)", async () => {
    const team = await makeTeam();
    await person(team.id, "owner");
    const one = await person(team.id, "analyst");
    const token = await tokenOf(one.id, team.id);
    await deleteAccount({ actor: one.actor, password: PASSWORD, caller });
    expect(await findSession(one.secret)).toBeNull();
    expect(await findToken(token)).toBeNull();
    const enter = () => outcome(signIn({ email: one.email, password: PASSWORD, stay: false, caller }));
    expect(await enter()).toBe("invalid");
    await restoreAccount({ secret: await secretTo(one.email, "restore-account"), caller });
    expect(await enter()).toBe("done");
    expect(await findToken(token)).toBeNull();

    const next = await startSession({ userId: one.id, stay: false, userAgent: null });
    const session = await findSession(next);
    const actor: Actor = { kind: "user", userId: one.id, sessionId: session?.sessionId ?? "" };
    await deleteAccount({ actor, password: PASSWORD, caller });
    await purgeDeleted(new Date(Date.now() + 29 * DAY_MS));
    expect(await db.$count(users, eq(users.id, one.id))).toBe(1);
    await purgeDeleted(new Date(Date.now() + 31 * DAY_MS));
    expect(await db.$count(users, eq(users.id, one.id))).toBe(0);
    expect(await db.$count(mailTokens, eq(mailTokens.userId, one.id))).toBe(0);
    expect(await db.$count(sessions, eq(sessions.userId, one.id))).toBe(0);
  });

  it("is told of a sign-in from a browser that is new, and of no other", async () => {
    const user = await makeUser();
    const enter = (userAgent: string) =>
      signIn({ email: user.email, password: PASSWORD, stay: false, caller: { ...caller, userAgent } });
    await enter("Firefox/1 (Linux)");
    await enter("Firefox/1 (Linux)");
    expect(await lettersTo(user.email)).toEqual([]);
    await enter("Chrome/9 (Windows)");
    expect((await lettersTo(user.email)).map(({ subject }) => subject)).toEqual([
      "A sign-in from a new browser on Lowlying",
    ]);
  });
});

describe("a team", () => {
  it("is deleted by its written name, with tokens and pages, and brought back by an owner", async () => {
    const team = await makeTeam("Slipway");
    const owner = await person(team.id, "owner");
    const analyst = await person(team.id, "analyst");
    const token = await tokenOf(analyst.id, team.id);
    const remove = (actor: Actor, name: string) => outcome(deleteTeam({ actor, teamId: team.id, name }));
    expect(await remove(analyst.actor, "Slipway")).toBe("forbidden");
    expect(await remove(owner.actor, "slip")).toBe("invalid");
    expect(await remove(owner.actor, "Slipway")).toBe("done");
    expect(await outcome(accessTeam(owner.actor, "read", team.id))).toBe("not-found");
    expect(await findToken(token)).toBeNull();
    expect((await loadAccount(owner.actor)).deletedTeams.map(({ name }) => name)).toEqual(["Slipway"]);
    expect((await loadAccount(analyst.actor)).deletedTeams).toEqual([]);
    expect(await outcome(restoreTeam({ actor: analyst.actor, teamId: team.id }))).toBe("not-found");
    expect(await outcome(restoreTeam({ actor: owner.actor, teamId: team.id }))).toBe("done");
    expect(await outcome(accessTeam(owner.actor, "read", team.id))).toBe("done");
    expect(await findToken(token)).not.toBeNull();
  });

  it("goes with all it holds after 30 days, its editions and links too (G06)", async () => {
    // Marked when it was made: the database lets nobody mark a team as deleted in the past, nor remove it earlier.
    const team = { id: newId(), name: "Tidemark" };
    const deletedAt = new Date(Date.now() - 29.5 * DAY_MS);
    await db.insert(teams).values({ ...team, createdAt: deletedAt, deletedAt });
    const owner = await person(team.id, "owner");
    await tokenOf(owner.id, team.id);
    const ensembleId = await makeEnsembleRow(team.id);
    const editionId = newId();
    await db.insert(editions).values({
      ...{ id: editionId, teamId: team.id, ensembleId, number: 1, title: "One", remark: "" },
      ...{ recipe: {}, inputs: [], codeVersion: "t", content: "{}", contentSha: Buffer.alloc(32) },
      ...{ positions: Buffer.alloc(0), files: [], createdAt: new Date() },
    });
    await db.insert(links).values({
      ...{ id: newId(), teamId: team.id, editionId, secretSha: Buffer.alloc(32, 7), prefix: "aaaa" },
      ...{ createdAt: new Date(), endsAt: new Date() },
    });
    await db.insert(editionFiles).values({ editionId, name: "a.csv", position: 0, data: Buffer.from("x") });
    await db.insert(verifications).values({
      ...{
        id: newId(),
        editionId,
        same: true,
        files: [],
        codeVersion: "t",
        seconds: 1,
        createdAt: new Date(),
      },
    });
    await purgeDeleted();
    expect(await db.$count(editions, eq(editions.id, editionId))).toBe(1);
    await purgeDeleted(new Date(Date.now() + DAY_MS));
    expect(await db.$count(teams, eq(teams.id, team.id))).toBe(0);
    expect(await db.$count(ensembles, eq(ensembles.id, ensembleId))).toBe(0);
    expect(await db.$count(editions, eq(editions.id, editionId))).toBe(0);
    expect(await db.$count(editionFiles, eq(editionFiles.editionId, editionId))).toBe(0);
    expect(await db.$count(verifications, eq(verifications.editionId, editionId))).toBe(0);
    expect(await db.$count(apiTokens, eq(apiTokens.teamId, team.id))).toBe(0);
  });

  it("shows owners when others were last there, and others only themselves (C07)", async () => {
    const team = await makeTeam();
    const owner = await makeMember(team.id, "owner");
    const reader = await person(team.id, "reader");
    const own: Actor = { kind: "user", userId: owner.id, sessionId: "" };
    const asOwner = await listPeople({ actor: own, teamId: team.id });
    expect(asOwner.members.every(({ sessions: open }) => open === 1)).toBe(true);
    const asReader = await listPeople({ actor: reader.actor, teamId: team.id });
    expect(asReader.members.map(({ you, sessions: open }) => [you, open])).toEqual([
      [false, null],
      [true, 1],
    ]);
  });
});

describe("the end of a link", () => {
  it("is told once, three days before, to who made it", async () => {
    const team = await makeTeam();
    const owner = await person(team.id, "owner");
    const now = new Date("2026-06-01T00:00:00Z");
    const editionId = newId();
    await db.insert(editions).values({
      ...{ id: editionId, teamId: team.id, ensembleId: newId(), number: 1, title: "One", remark: "" },
      ...{ recipe: {}, inputs: [], codeVersion: "t", content: "{}", contentSha: Buffer.alloc(32) },
      ...{ positions: Buffer.alloc(0), files: [], createdAt: now },
    });
    const link = (days: number, mark: number) => ({
      ...{ id: newId(), teamId: team.id, editionId, secretSha: Buffer.alloc(32, mark), prefix: "aaaa" },
      ...{ createdBy: owner.id, createdAt: now, endsAt: new Date(now.getTime() + days * DAY_MS) },
    });
    await db.insert(links).values([link(14, 1), link(2, 2)]);
    expect(await remindOfLinks(now)).toBe(0);
    const later = new Date(now.getTime() + 11.5 * DAY_MS);
    await chooseLetters({ actor: owner.actor, letters: { jobs: true, links: false, digest: false } });
    expect(await remindOfLinks(later)).toBe(0);
    await chooseLetters({ actor: owner.actor, letters: { jobs: true, links: true, digest: false } });
    expect(await remindOfLinks(later)).toBe(1);
    expect(await remindOfLinks(later)).toBe(0);
    expect((await lettersTo(owner.email)).map(({ subject }) => subject)).toEqual([
      "Your Lowlying link ends in three days",
    ]);
  });
});
