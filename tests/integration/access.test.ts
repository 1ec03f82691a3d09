import { and, eq } from "drizzle-orm";
import { beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { apiTokens, logbook, members, users } from "~/db/schema.server";
import { DomainError } from "~/lib/errors";
import {
  type Actor,
  accessEnsemble,
  accessSift,
  accessTeam,
  type MemberRole,
  type Verb,
} from "~/services/auth/access.server";
import { findToken } from "~/services/auth/find-token.server";
import { makeToken, makeTokenByEmail } from "~/services/auth/make-token.server";
import { join, makeMember, makeTeam, makeUser, tokenOf } from "../factories/people";
import { makeEnsembleRow, makeSiftRow } from "../factories/rows";

const VERBS = ["read", "read-source", "take-in", "compute", "remark", "share", "manage", "tokens"] as const;

/** What the table of roles says of each caller: y may, n sees it and may not (403), - does not see it (404). */
const TEAM: Record<string, string> = {
  owner: "yyyyyyyy",
  analyst: "yyyyyyny",
  reader: "yynnynny",
  outsider: "--------",
  anonymous: "--------",
  "full token of an owner": "yyyynnnn",
  "full token of an analyst": "yyyynnnn",
  "full token of a reader": "yynnnnnn",
  "read token of an analyst": "yynnnnnn",
  // In a team "compute" means a new ensemble: that is what such a token is for.
  "add token of an analyst": "yyyynnnn",
  "add token of a reader": "yynnnnnn",
  "token of another team": "--------",
};
const ENSEMBLE: Record<string, string> = {
  ...TEAM,
  "add token of an analyst": "--------",
  "add token of a reader": "--------",
};
const EXAMPLE: Record<string, string> = {
  ...ENSEMBLE,
  outsider: "yynnnnnn",
  anonymous: "yynnnnnn",
};
const TAKEN_IN_BY_TOKEN: Record<string, string> = {
  ...ENSEMBLE,
  "add token of an analyst": "yyynnnnn",
};
const NEVER = Object.fromEntries(Object.keys(TEAM).map((who) => [who, "--------"]));

const actors: Record<string, Actor> = {};
const objects = { team: "", ensemble: "", example: "", taken: "", deleted: "", sift: "", siftOfTaken: "" };

beforeAll(async () => {
  const team = await makeTeam();
  const other = await makeTeam();
  const tokens: Record<string, string> = {};
  for (const role of ["owner", "analyst", "reader"] as MemberRole[]) {
    const user = await makeMember(team.id, role);
    actors[role] = { kind: "user", userId: user.id, sessionId: newId() };
    for (const scope of ["full", "read", "add"] as const) {
      tokens[`${scope} ${role}`] = await tokenOf(user.id, team.id, scope);
    }
  }
  const outsider = await makeMember(other.id, "owner");
  actors.outsider = { kind: "user", userId: outsider.id, sessionId: newId() };
  actors.anonymous = { kind: "anonymous" };
  // The same person in both teams: the token still acts in its one.
  const both = await makeMember(team.id, "owner");
  await join(other.id, both.id, "owner");
  tokens.other = await tokenOf(both.id, other.id);
  const named: Record<string, string> = {
    "full owner": "full token of an owner",
    "full analyst": "full token of an analyst",
    "full reader": "full token of a reader",
    "read analyst": "read token of an analyst",
    "add analyst": "add token of an analyst",
    "add reader": "add token of a reader",
    other: "token of another team",
  };
  for (const [key, name] of Object.entries(named)) {
    actors[name] = (await findToken(tokens[key] ?? "")) ?? { kind: "anonymous" };
    expect(actors[name]?.kind).toBe("token");
  }
  const adding = actors["add token of an analyst"];
  const createdByToken = adding?.kind === "token" ? adding.tokenId : null;
  objects.team = team.id;
  objects.ensemble = await makeEnsembleRow(team.id);
  objects.example = await makeEnsembleRow(team.id, { example: true });
  objects.taken = await makeEnsembleRow(team.id, { createdByToken });
  objects.deleted = await makeEnsembleRow(team.id, { example: true, deletedAt: new Date() });
  objects.sift = await makeSiftRow(objects.ensemble);
  objects.siftOfTaken = await makeSiftRow(objects.taken);
});

/** One character for what the decision was. */
async function decision(ask: Promise<unknown>): Promise<string> {
  try {
    await ask;
    return "y";
  } catch (error) {
    if (!(error instanceof DomainError)) throw error;
    return error.code === "forbidden" ? "n" : error.code === "not-found" ? "-" : "?";
  }
}

async function row(who: string, ask: (actor: Actor, verb: Verb) => Promise<unknown>): Promise<string> {
  const actor = actors[who];
  if (actor === undefined) throw new Error(who);
  let decided = "";
  for (const verb of VERBS) decided += await decision(ask(actor, verb));
  return decided;
}

describe.each(Object.keys(TEAM))("%s", (who) => {
  it("in the team", async () => {
    expect(await row(who, (actor, verb) => accessTeam(actor, verb, objects.team))).toBe(TEAM[who]);
  });

  it("on an ensemble of the team", async () => {
    expect(await row(who, (actor, verb) => accessEnsemble(actor, verb, objects.ensemble))).toBe(
      ENSEMBLE[who],
    );
  });

  it("on the example", async () => {
    expect(await row(who, (actor, verb) => accessEnsemble(actor, verb, objects.example))).toBe(EXAMPLE[who]);
  });

  it("on an ensemble that a narrowed token took in", async () => {
    const asked = row(who, (actor, verb) => accessEnsemble(actor, verb, objects.taken));
    expect(await asked).toBe(TAKEN_IN_BY_TOKEN[who]);
  });

  it("on sifts, as on their ensembles", async () => {
    expect(await row(who, (actor, verb) => accessSift(actor, verb, objects.sift))).toBe(ENSEMBLE[who]);
    const ofTaken = row(who, (actor, verb) => accessSift(actor, verb, objects.siftOfTaken));
    expect(await ofTaken).toBe(TAKEN_IN_BY_TOKEN[who]);
  });

  it("on what is deleted, missing, or no id", async () => {
    const asks: ((actor: Actor, verb: Verb) => Promise<unknown>)[] = [
      (actor, verb) => accessEnsemble(actor, verb, objects.deleted),
      (actor, verb) => accessEnsemble(actor, verb, newId()),
      (actor, verb) => accessSift(actor, verb, newId()),
      (actor, verb) => accessTeam(actor, verb, newId()),
      (actor, verb) => accessTeam(actor, verb, objects.ensemble),
      (actor, verb) => accessEnsemble(actor, verb, `${objects.ensemble} `),
      (actor, verb) => accessEnsemble(actor, verb, objects.ensemble.toUpperCase()),
      (actor, verb) => accessEnsemble(actor, verb, "' or 1=1 -- "),
      (actor, verb) => accessSift(actor, verb, ""),
    ];
    for (const ask of asks) expect(await row(who, ask)).toBe(NEVER[who]);
  });
});

describe("what is refused", () => {
  it("reads alike for a foreign and a missing object", async () => {
    const outsider = actors.outsider ?? { kind: "anonymous" };
    const words = async (ask: Promise<unknown>) =>
      ask.then(
        () => "",
        (error: DomainError) =>
          `${error.code} ${error.title} ${error.message} ${JSON.stringify(error.extra)}`,
      );
    const foreign = await words(accessEnsemble(outsider, "read", objects.ensemble));
    expect(foreign).toContain("not-found");
    expect(await words(accessEnsemble(outsider, "read", newId()))).toBe(foreign);
    expect(await words(accessSift(outsider, "read", objects.sift))).toBe(foreign);
    expect(await words(accessTeam(outsider, "read", objects.team))).toBe(foreign);
  });

  it("follows a change of role on the next request", async () => {
    const team = await makeTeam();
    const user = await makeMember(team.id, "analyst");
    const actor: Actor = { kind: "user", userId: user.id, sessionId: newId() };
    const token = await findToken(await tokenOf(user.id, team.id));
    if (token === null) throw new Error("no token");
    const mine = and(eq(members.teamId, team.id), eq(members.userId, user.id));
    expect(await decision(accessTeam(actor, "compute", team.id))).toBe("y");
    await db.update(members).set({ role: "reader" }).where(mine);
    expect(await decision(accessTeam(actor, "compute", team.id))).toBe("n");
    expect(await decision(accessTeam(token, "compute", team.id))).toBe("n");
    await db.delete(members).where(mine);
    expect(await decision(accessTeam(actor, "read", team.id))).toBe("-");
    expect(await decision(accessTeam(token, "read", team.id))).toBe("-");
  });

  it("includes everything for a disabled account", async () => {
    const team = await makeTeam();
    const ensembleId = await makeEnsembleRow(team.id);
    const user = await makeMember(team.id, "owner");
    const actor: Actor = { kind: "user", userId: user.id, sessionId: newId() };
    await db.update(users).set({ disabledAt: new Date() }).where(eq(users.id, user.id));
    expect(await decision(accessTeam(actor, "read", team.id))).toBe("-");
    expect(await decision(accessEnsemble(actor, "read", ensembleId))).toBe("-");
  });
});

describe("a grant", () => {
  it("names the team to bind queries to, the role, and what narrows lists", async () => {
    const grant = await accessTeam(
      actors["add token of an analyst"] ?? { kind: "anonymous" },
      "read",
      objects.team,
    );
    expect(grant).toMatchObject({ teamId: objects.team, role: "analyst" });
    expect(grant.onlyOwnOfToken).toBe(grant.tokenId);
    const full = await accessTeam(
      actors["full token of an analyst"] ?? { kind: "anonymous" },
      "read",
      objects.team,
    );
    expect(full.onlyOwnOfToken).toBeNull();
    expect(await accessEnsemble({ kind: "anonymous" }, "read", objects.example)).toEqual({
      teamId: objects.team,
      role: "guest",
      userId: null,
      tokenId: null,
      origin: null,
      onlyOwnOfToken: null,
      ensembleId: objects.example,
    });
  });
});

describe("API tokens", () => {
  it("keep only their SHA-256 and a few characters to know them by (D07)", async () => {
    const team = await makeTeam();
    const user = await makeMember(team.id, "analyst");
    const made = await makeToken({ userId: user.id, teamId: team.id, name: "n", scope: "full", days: 1 });
    expect(made.token).toMatch(/^lowl_[A-Za-z0-9_-]{43}$/);
    expect(made.token.startsWith(made.prefix)).toBe(true);
    expect(made.prefix).toHaveLength(9);
    const [stored] = await db.select().from(apiTokens).where(eq(apiTokens.id, made.id));
    expect(stored?.tokenSha).toHaveLength(32);
    expect(JSON.stringify(stored)).not.toContain(made.token);
  });

  it("end on their day, when revoked, and with their user's membership or account (D07)", async () => {
    const team = await makeTeam();
    const begun = new Date("2026-03-01T00:00:00Z");
    const make = async () => {
      const user = await makeMember(team.id, "analyst");
      const made = await makeToken({
        userId: user.id,
        teamId: team.id,
        name: "n",
        scope: "full",
        days: 2,
        now: begun,
      });
      return { user, made };
    };
    const within = new Date("2026-03-02T23:59:59Z");
    const { user, made } = await make();
    expect(await findToken(made.token, within)).toMatchObject({ kind: "token", userId: user.id });
    expect(await findToken(made.token, new Date("2026-03-03T00:00:01Z"))).toBeNull();
    await db.update(apiTokens).set({ revokedAt: begun }).where(eq(apiTokens.id, made.id));
    expect(await findToken(made.token, within)).toBeNull();

    const left = await make();
    await db.delete(members).where(eq(members.userId, left.user.id));
    expect(await findToken(left.made.token, within)).toBeNull();

    const disabled = await make();
    await db.update(users).set({ disabledAt: begun }).where(eq(users.id, disabled.user.id));
    expect(await findToken(disabled.made.token, within)).toBeNull();
  });

  it("note their last use once a minute at most", async () => {
    const team = await makeTeam();
    const user = await makeMember(team.id, "analyst");
    const token = await tokenOf(user.id, team.id);
    const usedAt = async () =>
      (await db.select({ at: apiTokens.usedAt }).from(apiTokens).where(eq(apiTokens.userId, user.id)))[0]?.at;
    const first = new Date();
    await findToken(token, first);
    expect(await usedAt()).toEqual(first);
    await findToken(token, new Date(first.getTime() + 59_000));
    expect(await usedAt()).toEqual(first);
    const later = new Date(first.getTime() + 61_000);
    await findToken(token, later);
    expect(await usedAt()).toEqual(later);
  });

  it("are made from the command line for the first team, or the one that is named", async () => {
    const user = await makeUser();
    const first = await makeTeam("First team");
    const second = await makeTeam("Second team");
    await db.insert(members).values([
      { teamId: second.id, userId: user.id, role: "owner", createdAt: new Date("2026-02-01") },
      { teamId: first.id, userId: user.id, role: "reader", createdAt: new Date("2026-01-01") },
    ]);
    const make = async (team?: string) => {
      const made = await makeTokenByEmail({ email: user.email, team, name: "n" });
      // None is without an end (D07).
      expect(Math.round((made.endsAt.getTime() - Date.now()) / 86_400_000)).toBe(30);
      return (await findToken(made.token))?.teamId;
    };
    expect(await make()).toBe(first.id);
    expect(await make("Second team")).toBe(second.id);
    expect(await make(second.id)).toBe(second.id);
    await expect(make("Nowhere")).rejects.toThrow(/not in a team "Nowhere"/);
    const nobody = { email: "nobody@lab.example", name: "n" };
    await expect(makeTokenByEmail(nobody)).rejects.toThrow(/No user/);
  });

  it("of the command line may no more than their user's role, and stand in the logbook", async () => {
    const team = await makeTeam();
    const scopeOf = async (role: "reader" | "analyst", scope?: "full" | "read" | "add") => {
      const { email } = await makeMember(team.id, role);
      const made = await makeTokenByEmail({ email, scope, days: 2, name: "job" });
      return (await findToken(made.token))?.scope;
    };
    expect(await scopeOf("reader")).toBe("read");
    expect(await scopeOf("analyst")).toBe("full");
    expect(await scopeOf("analyst", "add")).toBe("add");
    for (const scope of ["full", "add"] as const) {
      await expect(scopeOf("reader", scope)).rejects.toThrow(/may only read/);
    }
    const entries = await db.select().from(logbook).where(eq(logbook.teamId, team.id));
    expect(entries.map(({ type }) => type)).toEqual(["token-made", "token-made", "token-made"]);
  });
});
