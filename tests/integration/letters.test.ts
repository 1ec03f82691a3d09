import { and, eq } from "drizzle-orm";
import { beforeEach, describe, expect, it, vi } from "vitest";
import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { jobs, mailQueue, members, throttles, users } from "~/db/schema.server";
import * as environment from "~/env.server";
import { confirmAddress, confirmAgain, findAddressChange } from "~/services/account/change-address.server";
import { chooseLetters, loadAccount } from "~/services/account/load-account.server";
import type { Actor } from "~/services/auth/access.server";
import { requestReset } from "~/services/auth/request-reset.server";
import { resetPassword } from "~/services/auth/reset-password.server";
import { settleBackground } from "~/services/background.server";
import { matrixJob } from "~/services/jobs/definitions/matrix";
import { siftJob } from "~/services/jobs/definitions/sift";
import { writeEntry } from "~/services/logbook/write-entry.server";
import { sendDigests } from "~/services/mail/digest.server";
import { tellOfIntake, tellOfJob } from "~/services/mail/long-work.server";
import { joinByPassword } from "~/services/people/accept-invitation.server";
import { invite } from "~/services/people/invite.server";
import { createToken } from "~/services/tokens/create-token.server";
import { revokeToken } from "~/services/tokens/revoke-token.server";
import { personOf } from "../factories/editions";
import { join, makeMember, makeTeam, makeUser, PASSWORD } from "../factories/people";
import { makeEnsembleRow, makeSiftRow } from "../factories/rows";
import { call } from "../setup/app";

const caller = { address: "192.0.2.7", userAgent: "Mozilla/5.0 (X11; Linux x86_64) Firefox/140.0" };
const MINUTE_MS = 60_000;
const DAY_MS = 86_400_000;

const lettersTo = (email: string) =>
  db.select().from(mailQueue).where(eq(mailQueue.recipient, email)).orderBy(mailQueue.createdAt);

const subjectsTo = async (email: string) => (await lettersTo(email)).map(({ subject }) => subject);

/** The secret of the newest confirming letter to an address. */
async function secretTo(email: string): Promise<string> {
  const bodies = (await lettersTo(email)).map(({ body }) => body);
  const found = bodies.map((body) => /\/confirm-address\/([\w-]{43})/.exec(body)?.[1]);
  return found.findLast((secret) => secret !== undefined) ?? "";
}

beforeEach(async () => {
  await db.delete(throttles);
  await db.delete(mailQueue);
});

describe("the letter that confirms an address", () => {
  const person = { name: "Ada Quist", password: PASSWORD };

  /** Signs up as the form does; the account as its page shows it. */
  async function signedUp() {
    const real = environment.env();
    // why: settings are read once a process.
    vi.spyOn(environment, "env").mockReturnValue({ ...real, OPEN_SIGN_UP: true });
    const email = `${newId()}@lab.example`;
    expect((await call("/sign-up", { form: { ...person, email } })).status).toBe(303);
    const [row] = await db.select().from(users).where(eq(users.email, email));
    const actor = personOf(row?.id ?? "");
    return { email, actor, id: row?.id ?? "" };
  }

  it("goes out at sign-up; the account works without, and its page says that it waits", async () => {
    const { email, actor } = await signedUp();
    expect(await subjectsTo(email)).toEqual(["Confirm your address for Lowlying"]);
    expect((await loadAccount(actor)).confirmed).toBe(false);
    const secret = await secretTo(email);
    // Mail programs open links before people do.
    const page = await call(`/confirm-address/${secret}`);
    expect([page.status, (await loadAccount(actor)).confirmed]).toEqual([200, false]);
    expect((await call(`/confirm-address/${secret}`, { form: {} })).status).toBe(303);
    expect((await loadAccount(actor)).confirmed).toBe(true);
    expect((await call(`/confirm-address/${secret}`)).status).toBe(404);
    // Nothing changed that an old address would be told of.
    expect(await subjectsTo(email)).toEqual(["Confirm your address for Lowlying"]);
  });

  it("can be had again; the newest alone works, and a confirmed address gets none (A08)", async () => {
    const { email, actor } = await signedUp();
    const first = await secretTo(email);
    await confirmAgain({ actor });
    const second = await secretTo(email);
    expect(second).not.toBe(first);
    expect([await findAddressChange(first), await findAddressChange(second)]).toEqual([null, email]);
    await confirmAddress({ secret: second, caller });
    await confirmAgain({ actor });
    expect(await lettersTo(email)).toHaveLength(2);
    for (let n = 0; n < 12; n++) await confirmAgain({ actor });
    expect(await lettersTo(email)).toHaveLength(2);
  });

  it("is not needed by whoever came by another letter: an invitation, a reset", async () => {
    const team = await makeTeam();
    const owner = await makeMember(team.id, "owner");
    const email = `${newId()}@lab.example`;
    await invite({ actor: personOf(owner.id), teamId: team.id, email, role: "reader" });
    const [letter] = await lettersTo(email);
    const secret = /\/invitation\/([\w-]+)/.exec(letter?.body ?? "")?.[1] ?? "";
    await joinByPassword({ secret, name: "Bo Ferrant", password: PASSWORD, caller });
    const [joined] = await db.select().from(users).where(eq(users.email, email));
    expect((await loadAccount(personOf(joined?.id ?? ""))).confirmed).toBe(true);

    const { email: other, actor } = await signedUp();
    await requestReset({ email: other, caller });
    await settleBackground();
    const bodies = (await lettersTo(other)).map(({ body }) => body).join("\n");
    const reset = /\/reset-password\/([\w-]+)/.exec(bodies)?.[1] ?? "";
    await resetPassword({ secret: reset, password: "nine grey herons stand", caller });
    expect((await loadAccount(actor)).confirmed).toBe(true);
  });
});

describe("letters of tokens", () => {
  it("tell a person of a token made in their name, and of its end", async () => {
    const team = await makeTeam("Narrows");
    const analyst = await makeMember(team.id, "analyst");
    const owner = await makeMember(team.id, "owner");
    const token = { name: "MARKER of a purpose", scope: "full", days: 7 } as const;
    const made = await createToken({ actor: personOf(analyst.id), teamId: team.id, token });
    await revokeToken({ actor: personOf(owner.id), teamId: team.id, tokenId: made.id });
    const told = await lettersTo(analyst.email);
    expect(told.map(({ subject }) => subject)).toEqual([
      "A token was made for your Lowlying account",
      "A token of yours was revoked",
    ]);
    for (const { body } of told) {
      expect(body).toContain(made.prefix);
      expect(body).not.toContain(made.token);
      expect(body).not.toContain("MARKER");
    }
    expect(await lettersTo(owner.email)).toEqual([]);
  });
});

describe("the letter of long work", () => {
  async function setUp() {
    const team = await makeTeam();
    const user = await makeUser();
    await join(team.id, user.id, "analyst");
    const ensembleId = await makeEnsembleRow(team.id);
    const siftId = await makeSiftRow(ensembleId);
    return { team, user, ensembleId, siftId, actor: personOf(user.id) };
  }

  /** A job that somebody asked for `minutes` before its end. */
  async function jobOf(
    at: Awaited<ReturnType<typeof setUp>>,
    minutes: number,
    state: "done" | "failed" | "cancelled" = "done",
    definition: string = siftJob.name,
  ) {
    const id = newId();
    const finishedAt = new Date();
    await db.insert(jobs).values({
      ...{ id, definition, version: 1, teamId: at.team.id, userId: at.user.id, state, holder: "here" },
      payload: definition === siftJob.name ? { siftId: at.siftId } : { matrixId: newId() },
      error: "MARKER of the reason",
      createdAt: new Date(finishedAt.getTime() - minutes * MINUTE_MS),
      finishedAt,
    });
    return id;
  }

  it("says what ended, after how long and where, and nothing of the compound", async () => {
    const at = await setUp();
    await tellOfJob(await jobOf(at, 3), "here");
    await tellOfJob(await jobOf(at, 3, "failed"), "here");
    await tellOfJob(await jobOf(at, 4, "done", matrixJob.name), "here");
    const told = await lettersTo(at.user.email);
    expect(told.map(({ subject }) => subject).toSorted()).toEqual([
      "Your sift on Lowlying failed",
      "Your sift on Lowlying is done",
      "Your table of pair distances on Lowlying is done",
    ]);
    const [done] = told.filter(({ subject }) => subject.endsWith("sift on Lowlying is done"));
    expect(done?.body).toContain("A sift of yours is done after 3 minutes.");
    expect(done?.body).toContain(`/ensembles/${at.ensembleId}/distinct-set`);
    for (const { body } of told) expect(body).not.toMatch(/MARKER|An ensemble|H2O/);
  });

  it("is not sent of short work, a cancelled job, or by a process that lost it", async () => {
    const at = await setUp();
    await tellOfJob(await jobOf(at, 2), "here");
    await tellOfJob(await jobOf(at, 9, "cancelled"), "here");
    await tellOfJob(await jobOf(at, 9), "elsewhere");
    expect(await lettersTo(at.user.email)).toEqual([]);
  });

  it("is not sent to who does not want it, or has left the team", async () => {
    const at = await setUp();
    await chooseLetters({ actor: at.actor, letters: { jobs: false, links: true, digest: false } });
    await tellOfJob(await jobOf(at, 9), "here");
    await chooseLetters({ actor: at.actor, letters: { jobs: true, links: true, digest: false } });
    await db.delete(members).where(and(eq(members.teamId, at.team.id), eq(members.userId, at.user.id)));
    await tellOfJob(await jobOf(at, 9), "here");
    expect(await lettersTo(at.user.email)).toEqual([]);
  });

  it("is sent of an intake too, taken in or refused, and at most twenty a day", async () => {
    const at = await setUp();
    const grant = { teamId: at.team.id, userId: at.user.id };
    const now = Date.now();
    tellOfIntake({ grant, began: now - 60_000, ensembleId: at.ensembleId, now });
    tellOfIntake({ grant, began: now - 150_000, ensembleId: at.ensembleId, now });
    tellOfIntake({ grant, began: now - 150_000, ensembleId: null, now });
    await settleBackground();
    expect((await subjectsTo(at.user.email)).toSorted()).toEqual([
      "Your intake on Lowlying failed",
      "Your intake on Lowlying is done",
    ]);
    for (let n = 0; n < 25; n++) {
      tellOfIntake({ grant, began: now - 150_000, ensembleId: at.ensembleId, now });
      await settleBackground();
    }
    expect(await lettersTo(at.user.email)).toHaveLength(20);
  });
});

describe("the weekly letter", () => {
  const digest = (actor: Actor, wanted: boolean, now: Date) =>
    chooseLetters({ actor, letters: { jobs: true, links: true, digest: wanted }, now });

  it("comes only to who asked, a week after, in counts, once", async () => {
    const team = await makeTeam("Narrows");
    const [one, other] = [await makeMember(team.id, "reader"), await makeMember(team.id, "analyst")];
    const by = { userId: other.id, tokenId: null };
    const now = new Date();
    await digest(personOf(one.id), true, now);
    for (const text of ["MARKER one", "MARKER two"]) {
      await writeEntry(db, { teamId: team.id }, by, { type: "remark", data: { text } });
    }
    const data = { number: 1, title: "MARKER", conformers: 3, sha256: "00" };
    await writeEntry(db, { teamId: team.id }, by, { type: "edition-frozen", data });
    await sendDigests(new Date(now.getTime() + 6.9 * DAY_MS));
    expect(await lettersTo(one.email)).toEqual([]);
    const later = new Date(now.getTime() + 6.99 * DAY_MS);
    await db
      .update(users)
      .set({ digestAt: new Date(now.getTime() - DAY_MS) })
      .where(eq(users.id, one.id));
    await Promise.all([sendDigests(later), sendDigests(later)]);
    const told = await lettersTo(one.email);
    expect(told).toHaveLength(1);
    expect(told[0]?.body).toContain("Narrows: 1 edition frozen, 2 remarks");
    expect(told[0]?.body).not.toContain("MARKER");
    expect(await lettersTo(other.email)).toEqual([]);
  });

  it("is left out for a week in which nothing happened", async () => {
    const team = await makeTeam();
    const one = await makeMember(team.id, "reader");
    const now = new Date();
    await digest(personOf(one.id), true, now);
    await sendDigests(new Date(now.getTime() + 8 * DAY_MS));
    expect(await lettersTo(one.email)).toEqual([]);
    await digest(personOf(one.id), false, now);
    expect((await loadAccount(personOf(one.id))).letters.digest).toBe(false);
  });
});
