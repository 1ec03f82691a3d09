import { existsSync, readFileSync } from "node:fs";
import path from "node:path";
import { eq } from "drizzle-orm";
import { describe, expect, it, vi } from "vitest";
import { db } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { apiTokens, jobs, members } from "~/db/schema.server";
import { accessEnsemble, accessTeam } from "~/services/auth/access.server";
import { findToken } from "~/services/auth/find-token.server";
import * as health from "~/services/health.server";
import { whileAllowed } from "~/services/while-allowed";
import { makeTeam } from "../../factories/people";
import { makeEnsembleRow } from "../../factories/rows";
import { makeLab } from "../../factories/upload";
import { call, routeRows } from "../../setup/app";

const ROOT = path.join(import.meta.dirname, "../../..");

describe("readiness (security G04)", () => {
  const ready = async () => {
    const answer = await call("/readyz");
    return `${answer.status} ${(await answer.text()).trim()}`;
  };
  const HOUR_MS = 3_600_000;
  const job = (teamId: string, more: Partial<typeof jobs.$inferInsert>) => ({
    ...{ id: newId(), definition: "sift", version: 1, teamId, payload: {} },
    ...{ state: "queued" as const, createdAt: new Date(Date.now() - HOUR_MS) },
    ...more,
  });

  it("tells that it is ready, and no figures", async () => {
    expect(await ready()).toBe("200 ready");
  });

  it("looks at the database", async () => {
    vi.spyOn(health, "notReadyBecause").mockResolvedValue("the database does not answer");
    expect((await call("/readyz")).status).toBe(503);
  });

  it("looks at the disk", async () => {
    expect(await health.notReadyBecause(async () => 2 ** 26 - 1)).toBe("there is no room on the disk");
    expect(await health.notReadyBecause(async () => 2 ** 26)).toBeNull();
  });

  it("looks at the age of the queue, and is content while somebody works", async () => {
    const team = await makeTeam();
    await db.insert(jobs).values(job(team.id, {}));
    expect(await ready()).toBe("503 jobs wait and nobody works on them");
    const leaseUntil = new Date(Date.now() + 60_000);
    const running = job(team.id, { state: "running", holder: "x", leaseUntil });
    await db.insert(jobs).values(running);
    expect(await ready()).toBe("200 ready");
    await db
      .update(jobs)
      .set({ leaseUntil: new Date(Date.now() - HOUR_MS) })
      .where(eq(jobs.id, running.id));
    expect((await ready()).slice(0, 3)).toBe("503");
    await db.delete(jobs);
    expect(await ready()).toBe("200 ready");
  });

  it("has no address for metrics or debugging", async () => {
    const paths = routeRows().map(({ path: one }) => one ?? "");
    expect(paths.filter((one) => /metric|debug|status|admin|env|config/i.test(one))).toEqual([]);
    for (const one of ["/metrics", "/debug", "/server-status", "/.env", "/.git/config"]) {
      expect((await call(one)).status, one).toBe(404);
    }
  });
});

describe("a download that runs", () => {
  it("breaks off before the next piece once the role is gone (C05)", async () => {
    const lab = await makeLab();
    // Bytes that do not compress, so that the stored file has several pieces.
    let seed = 1;
    const noise = () => {
      seed = (seed * 48_271) % 2_147_483_647;
      return (seed / 2_147_483_647).toFixed(9);
    };
    const atom = (_: unknown, k: number) => `He ${k * 5}${noise().slice(1)} ${noise()} ${noise()}`;
    const frames = Array.from(
      { length: 60 },
      () => `1000\nno number\n${Array.from({ length: 1000 }, atom).join("\n")}\n`,
    );
    const content = frames.join("");
    // In pieces as they come over a line: what is kept is cut where they end.
    const head = `--b\r\nContent-Disposition: form-data; name="file"; filename="large.xyz"\r\n\r\n`;
    const body = Buffer.from(`${head}${content}\r\n--b--\r\n`);
    let sent = 0;
    const stream = new ReadableStream({
      pull(controller) {
        if (sent >= body.length) return controller.close();
        controller.enqueue(new Uint8Array(body.subarray(sent, sent + 65_536)));
        sent += 65_536;
      },
    });
    const headers = { "content-type": "multipart/form-data; boundary=b" };
    const taken = await call("/api/v1/ensembles", {
      method: "POST",
      token: lab.token,
      body: stream,
      headers,
    });
    const { id }: { id: string } = await taken.json();
    expect(taken.status).toBe(201);
    const answer = await call(`/files/ensembles/${id}/sources/0`, { cookie: lab.analyst.cookie });
    const reader = answer.body?.getReader();
    const first = await reader?.read();
    expect(first?.value?.length).toBeGreaterThan(0);
    expect(first?.value?.length).toBeLessThan(content.length);
    await db.delete(members).where(eq(members.userId, lab.analyst.id));
    const rest = async () => {
      for (;;) {
        const next = await reader?.read();
        if (next?.done) return "to its end";
      }
    };
    await expect(rest()).rejects.toMatchObject({ code: "not-found" });
  });

  it.each([
    ["revoked", { revokedAt: new Date() }],
    ["past its end", { endsAt: new Date(Date.now() - 1000) }],
  ])("of a token breaks off once the token is %s (C05, D07)", async (_, change) => {
    const lab = await makeLab();
    const ensembleId = await makeEnsembleRow(lab.team.id);
    const actor = await findToken(lab.token);
    if (actor === null) throw new Error("no token");
    async function* pieces() {
      for (let k = 0; k < 4; k++) yield k;
    }
    const got: number[] = [];
    const taking = async (ask: () => Promise<unknown>) => {
      for await (const piece of whileAllowed(pieces(), ask)) {
        got.push(piece);
        if (piece === 1) await db.update(apiTokens).set(change).where(eq(apiTokens.id, actor.tokenId));
      }
    };
    const read = taking(() => accessEnsemble(actor, "read", ensembleId));
    await expect(read).rejects.toMatchObject({ code: "not-found" });
    expect(got).toEqual([0, 1]);
    await expect(accessTeam(actor, "read", lab.team.id)).rejects.toMatchObject({ code: "not-found" });
    // The call after it is that of no token.
    expect((await call("/api/v1/ensembles", { token: lab.token })).status).toBe(401);
  });

  it("is asked about before every piece but the first", async () => {
    const asked: number[] = [];
    async function* pieces() {
      for (let k = 0; k < 4; k++) yield k;
    }
    const got: number[] = [];
    const taking = (async () => {
      for await (const piece of whileAllowed(pieces(), async () => {
        asked.push(got.length);
        if (got.length === 2) throw new Error("gone");
      })) {
        got.push(piece);
      }
    })();
    await expect(taking).rejects.toThrow("gone");
    expect([got, asked]).toEqual([
      [0, 1],
      [1, 2],
    ]);
  });
});

describe("what lies in the repository", () => {
  it("holds no secret: the sample of settings names none (security G05)", () => {
    const sample = readFileSync(path.join(ROOT, ".env.example"), "utf8");
    const set = sample.split("\n").filter((line) => /^\s*[A-Z]/.test(line));
    expect(set.length).toBeGreaterThan(10);
    // What could be a secret stands there as a comment, empty or with a word in place of it.
    expect(
      set.filter((line) => /SECRET|PASSWORD|KEY|DATABASE_URL|SMTP_URL/.test(line.split("=", 1)[0] ?? "")),
    ).toEqual([]);
    expect(sample).toMatch(/^#SESSION_SECRET=$/m);
    if (existsSync(path.join(ROOT, ".npmrc"))) {
      expect(readFileSync(path.join(ROOT, ".npmrc"), "utf8")).not.toMatch(/_auth|token|password/i);
    }
    expect(readFileSync(path.join(ROOT, ".gitignore"), "utf8")).toMatch(/^\/?\.env$/m);
  });

  it("locks the framework at a version without the known holes, and every package by its checksum (B09)", () => {
    const lock: { packages: Record<string, { version: string; integrity?: string; inBundle?: boolean }> } =
      JSON.parse(readFileSync(path.join(ROOT, "package-lock.json"), "utf8"));
    const atLeast = (version: string, least: [number, number, number]) => {
      const parts = version.split(".").map(Number);
      const at = parts.findIndex((part, k) => part !== least[k]);
      return at === -1 || (parts[at] ?? 0) > (least[at] ?? 0);
    };
    for (const name of ["react-router", "@react-router/node", "@react-router/dev"]) {
      const version = lock.packages[`node_modules/${name}`]?.version ?? "0.0.0";
      expect(atLeast(version, [7, 18, 3]), `${name} ${version}`).toBe(true);
    }
    const bare = Object.entries(lock.packages).filter(
      ([name, { integrity, inBundle }]) => name !== "" && !inBundle && !integrity?.startsWith("sha512-"),
    );
    expect(bare.map(([name]) => name)).toEqual([]);
  });
});
