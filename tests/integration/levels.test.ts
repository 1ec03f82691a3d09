import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db, inTransaction } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { plans } from "~/db/schema.server";
import { compareLevels } from "~/lib/levels/compare";
import { pairLevels, unpackEnergies } from "~/lib/levels/level-energies";
import { pooledWindow } from "~/lib/levels/pooled";
import { firstPlans } from "~/lib/plan/start";
import type { Actor } from "~/services/auth/access.server";
import { lockEnsemble, storeColumn } from "~/services/columns/store-column.server";
import { loadLevelEnergies } from "~/services/levels/load-level-energies.server";
import { loadSeriesLevels } from "~/services/levels/load-series-levels.server";
import { loadLogbook } from "~/services/logbook/load-logbook.server";
import { listPlans, listRemovedPlans } from "~/services/plans/list-plans.server";
import { removePlans } from "~/services/plans/remove-plans.server";
import { savePlans } from "~/services/plans/save-plans.server";
import { makeMember } from "../factories/people";
import { makeLab, post, reference, sifted, takenIn, withJobs } from "../factories/upload";
import { call } from "../setup/app";

const CHEAP = [0.3, 0, 1.4, 1.1, 2.9, 2.5];
const BETTER = [0, 0.4, 0.9, 1.5, 2.2, 3];
const person = (userId: string): Actor => ({ kind: "user", userId, sessionId: "s" });

/** Six of the distinct conformers of ac-ala (fixtures/README.md) that carry the energies of the worked example. */
function sixFrames(): string {
  const lines = reference("ac-ala-levels/ac-ala-nhme.mmff94.xyz").toString().split("\n");
  const height = Number(lines[0]) + 2;
  return CHEAP.map((energy, k) => {
    const frame = lines.slice(k * height, (k + 1) * height);
    frame[1] = `energy=${energy}`;
    return frame.join("\n");
  }).join("\n");
}

let lab: Awaited<ReturnType<typeof makeLab>>;
let actor: Actor;
let ensembleId: string;
let jobs: Awaited<ReturnType<typeof withJobs>>;

beforeAll(async () => {
  jobs = await withJobs();
  lab = await makeLab("Levels");
  actor = person(lab.analyst.id);
  const taken = await takenIn(lab.token, [{ name: "six.xyz", content: `${sixFrames()}\n` }], {
    level: "cheap",
    energyUnit: "kcal/mol",
    series: "Acids",
  });
  ensembleId = taken.id;
  // In another unit and far from zero: subtracted first, converted once.
  const values = Float64Array.from(BETTER, (kcal) => -1000 + kcal * 4.184);
  await inTransaction(async (tx) => {
    await lockEnsemble(tx, { teamId: lab.team.id, ensembleId });
    await storeColumn(
      tx,
      { ensembleId, userId: lab.analyst.id },
      {
        name: "better",
        kind: "energy",
        unit: "kJ/mol",
        data: { values, present: new Uint8Array(6).fill(1) },
        origin: "table:better.csv",
        energyKind: "electronic",
      },
    );
  });
}, 60_000);
afterAll(() => jobs.stop());

describe("energies of the levels", () => {
  const paired = async () => {
    const views = await loadLevelEnergies({ actor, ensembleId });
    const [cheap, better] = views.map((view) => unpackEnergies(view, 6));
    const members = CHEAP.map((_, k) => ({ frame: k + 1, name: `frame ${k + 1}`, weight: 1 }));
    return pairLevels(members, cheap!, better!);
  };

  it("reach the page in kcal/mol, and give the worked example there", async () => {
    const found = compareLevels({ ...(await paired()), temperatureK: 298.15 });
    expect(found.mad).toBeCloseTo(0.46667, 5);
    expect(found.rmsd).toBeCloseTo(0.48189, 5);
    expect(found.kendall).toBeCloseTo(0.6, 12);
    expect(found.populationOverlap).toBeCloseTo(0.69924, 5);
  });

  it("leave held frames out, and measure from the lowest that is left", async () => {
    await post(lab.token, `/ensembles/${ensembleId}/frames/2/hold`, { reason: "to see what moves" });
    const found = await paired();
    expect(found.left.map((member) => member.frame)).toEqual([2]);
    expect(Array.from(found.level, (v) => Number(v.toFixed(9)))).toEqual([0, 1.1, 0.8, 2.6, 2.2]);
    await post(lab.token, `/ensembles/${ensembleId}/frames/2/release`, { reason: "seen" });
    expect((await paired()).left).toEqual([]);
  });

  it("are nobody's business in another team", async () => {
    const other = await makeLab("Elsewhere");
    await expect(loadLevelEnergies({ actor: person(other.analyst.id), ensembleId })).rejects.toMatchObject({
      code: "not-found",
    });
  });
});

describe("the pages", () => {
  it("tell the comparison in one sentence without a script", async () => {
    const sift = await sifted(lab.token, ensembleId, { level: "cheap" });
    expect(sift.result?.kept).toHaveLength(6);
    const answer = await call(`/ensembles/${ensembleId}/levels?of=accepted`, { cookie: lab.analyst.cookie });
    expect(answer.status).toBe(200);
    const text = (await answer.text()).replaceAll("\u00a0", " ").replaceAll("<!-- -->", "");
    expect(text).toContain(
      "cheap puts the lowest conformer of better, frame 1, 2nd, 0.30 kcal/mol up, and prefers frame 2",
    );
    expect(text).toContain("carry 1.40 kcal/mol of cheap: 4 of 6 conformers");
  });

  it("say what they need where there is one level only", async () => {
    const one = await takenIn(lab.token, [{ name: "one.xyz", content: `${sixFrames()}\n\n` }], {
      level: "alone",
      energyUnit: "kcal/mol",
      series: "Acids",
    });
    const answer = await call(`/ensembles/${one.id}/levels`, { cookie: lab.analyst.cookie });
    const text = await answer.text();
    expect(text).toContain("A second level is needed");
    expect(text).toContain(`/ensembles/${one.id}/columns`);
    const plan = await call(`/ensembles/${one.id}/plan`, { cookie: lab.analyst.cookie });
    expect(plan.status).toBe(200);
  });
});

describe("one window for a series", () => {
  it("takes sifted ensembles that have both levels, and says why the others do not count", async () => {
    const found = await loadSeriesLevels({ actor, teamId: lab.team.id });
    // The only two that one ensemble has together.
    expect(found).toMatchObject({ level: "cheap", reference: "better" });
    const named = await loadSeriesLevels({ actor, teamId: lab.team.id, level: "cheap", reference: "better" });
    expect(named.molecules.map((m) => m.level.length)).toEqual([6]);
    expect(named.left.map(({ why }) => why)).toEqual(["no energies at cheap"]);
    const pooled = pooledWindow(named.molecules, { share: 0.95, ofMolecules: 0.9, temperatureK: 298.15 });
    expect(pooled.each[0]?.of).toBe(6);
    const page = await call(`/teams/${lab.team.id}/windows?level=cheap&ref=better&keep=95`, {
      cookie: lab.analyst.cookie,
    });
    const text = (await page.text()).replaceAll("\u00a0", " ").replaceAll("<!-- -->", "");
    expect(text).toContain("To keep 95 % of the better population for the one molecule here, carry");
  });

  it("hides the series of another team", async () => {
    const page = await call(`/teams/${lab.team.id}/windows?series=${newId()}`, {
      cookie: lab.analyst.cookie,
    });
    expect(page.status).toBe(404);
  });
});

describe("plans", () => {
  const set = () =>
    firstPlans([{ id: "cheapcheapcheapc", name: "cheap" }], { sift: null, temperatureK: 298.15, n: 6 });

  it("are kept with their version, and noted in the logbook", async () => {
    const first = await savePlans({ actor, ensembleId, name: "Spring", plans: set() });
    expect(first.version).toBe(1);
    const second = await savePlans({
      actor,
      ensembleId,
      name: "Spring",
      plans: { ...set(), chosen: 0 },
      id: first.id,
      version: 1,
    });
    expect(second).toEqual({ id: first.id, version: 2 });
    expect(await listPlans({ actor, ensembleId })).toMatchObject([
      { id: first.id, name: "Spring", version: 2, plans: { chosen: 0 } },
    ]);
    const { rows } = await loadLogbook({ actor, ensembleId });
    expect(rows.slice(0, 2).map(({ text, detail }) => [text, detail])).toEqual([
      ["Saved the plan Spring", "version 2"],
      ["Saved the plan Spring", null],
    ]);
  });

  it("are not overwritten by who opened an older version, nor under another's name (F07)", async () => {
    const [spring] = await listPlans({ actor, ensembleId });
    const again = { actor, ensembleId, name: "Spring", plans: set(), id: spring!.id, version: 1 };
    await expect(savePlans(again)).rejects.toMatchObject({ code: "conflict" });
    await expect(savePlans({ actor, ensembleId, name: "Spring", plans: set() })).rejects.toMatchObject({
      code: "conflict",
    });
    expect((await listPlans({ actor, ensembleId }))[0]).toMatchObject({ version: 2, plans: { chosen: 0 } });
  });

  it.each([
    ["no plan", { version: 1 }],
    [
      "a plan without a step",
      { ...set(), plans: [{ name: "a", plan: { ...set().plans[0]!.plan, steps: [] } }] },
    ],
    ["nothing", null],
  ])("refuse %s", async (_name, plans) => {
    await expect(savePlans({ actor, ensembleId, name: "Bad", plans })).rejects.toMatchObject({
      code: "invalid",
    });
  });

  it("belong to analysts and owners; a reader reads them; elsewhere they are not there", async () => {
    const reader = person((await makeMember(lab.team.id, "reader")).id);
    const other = person((await makeLab("Yet elsewhere")).analyst.id);
    expect(await listPlans({ actor: reader, ensembleId })).toHaveLength(1);
    const id = (await listPlans({ actor, ensembleId }))[0]!.id;
    await expect(savePlans({ actor: reader, ensembleId, name: "Mine", plans: set() })).rejects.toMatchObject({
      code: "forbidden",
    });
    await expect(removePlans({ actor: reader, ensembleId, id })).rejects.toMatchObject({ code: "forbidden" });
    await expect(removePlans({ actor: other, ensembleId, id })).rejects.toMatchObject({ code: "not-found" });
    await expect(removePlans({ actor, ensembleId, id: newId() })).rejects.toMatchObject({
      code: "not-found",
    });
  });

  it("come back when they were removed, unless their name went to another", async () => {
    const [spring] = await listPlans({ actor, ensembleId });
    const at = { actor, ensembleId, id: spring!.id };
    await removePlans(at);
    expect(await listPlans({ actor, ensembleId })).toEqual([]);
    expect(await listRemovedPlans({ actor, ensembleId })).toMatchObject([{ id: spring!.id, name: "Spring" }]);
    await expect(removePlans(at)).rejects.toMatchObject({ code: "not-found" });
    const change = { actor, ensembleId, name: "Spring", plans: set() };
    await expect(savePlans({ ...change, id: spring!.id, version: 2 })).rejects.toMatchObject({
      code: "not-found",
    });
    const second = await savePlans(change);
    await expect(removePlans({ ...at, undo: true })).rejects.toMatchObject({ code: "conflict" });
    await removePlans({ ...at, id: second.id });
    await removePlans({ ...at, undo: true });
    expect(await listPlans({ actor, ensembleId })).toEqual([spring]);
    const { rows } = await loadLogbook({ actor, ensembleId });
    expect(rows[0]?.text).toBe("Brought the plan Spring back");
  });

  it("leave out what nobody can read any more, and go when they are removed", async () => {
    const now = new Date();
    await db.insert(plans).values({
      id: newId(),
      ensembleId,
      name: "Old",
      plan: { version: 0 },
      createdAt: now,
      changedAt: now,
    });
    const [spring, ...rest] = await listPlans({ actor, ensembleId });
    expect(rest).toEqual([]);
    await removePlans({ actor, ensembleId, id: spring!.id });
    expect(await listPlans({ actor, ensembleId })).toEqual([]);
  });

  it("are refused on the page with words, not with a crash", async () => {
    const body = new URLSearchParams({ intent: "save", name: "", plans: "no json" });
    const answer = await call(`/ensembles/${ensembleId}/plan`, {
      method: "POST",
      cookie: lab.analyst.cookie,
      body,
      headers: { "content-type": "application/x-www-form-urlencoded" },
    });
    expect(answer.status).toBe(422);
  });
});
