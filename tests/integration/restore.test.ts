import { eq } from "drizzle-orm";
import { beforeAll, describe, expect, it } from "vitest";
import { db } from "~/db/client.server";
import { logbook } from "~/db/schema.server";
import { deleteEnsemble } from "~/services/ensembles/delete-ensemble.server";
import { listEnsembles } from "~/services/ensembles/list-ensembles.server";
import { restoreEnsemble } from "~/services/ensembles/restore-ensemble.server";
import { makeMember, tokenOf } from "../factories/people";
import { frame, makeLab, takenIn, upload } from "../factories/upload";

const fields = { level: "A method", energyUnit: "kcal/mol" };
const file = (n: number) => ({ name: "run.xyz", content: frame(`energy=-${n}.5`) + frame(`energy=-${n}.4`) });

describe("an ensemble that was deleted", () => {
  let lab: Awaited<ReturnType<typeof makeLab>>;
  let owner: { kind: "user"; userId: string; sessionId: string };
  let analyst: typeof owner;
  let token: string;
  beforeAll(async () => {
    lab = await makeLab();
    const person = await makeMember(lab.team.id, "owner");
    owner = { kind: "user", userId: person.id, sessionId: "none" };
    analyst = { kind: "user", userId: lab.analyst.id, sessionId: "none" };
    token = await tokenOf(person.id, lab.team.id);
  });
  const names = async () => (await listEnsembles({ actor: owner, teamId: lab.team.id })).map((row) => row.id);

  it("comes back as it was, answers for its files again, and the logbook says who did it", async () => {
    const { id } = await takenIn(token, [file(1)], fields);
    await deleteEnsemble({ actor: owner, ensembleId: id });
    expect(await names()).not.toContain(id);
    await restoreEnsemble({ actor: owner, ensembleId: id });
    expect(await names()).toContain(id);
    const again = await upload(token, [file(1)], fields);
    expect(again.status).toBe(200);
    expect((await again.json()).id).toBe(id);
    const entries = await db.select().from(logbook).where(eq(logbook.ensembleId, id));
    expect(entries.map((entry) => entry.type)).toEqual(expect.arrayContaining(["deleted", "restored"]));
    expect(entries.find((entry) => entry.type === "restored")?.userId).toBe(owner.userId);
  });

  it("comes back beside the one that its files made meanwhile, which goes on answering for them", async () => {
    const { id } = await takenIn(token, [file(2)], fields);
    await deleteEnsemble({ actor: owner, ensembleId: id });
    const anew = await takenIn(token, [file(2)], fields);
    await restoreEnsemble({ actor: owner, ensembleId: id });
    expect(await names()).toEqual(expect.arrayContaining([id, anew.id]));
    expect((await (await upload(token, [file(2)], fields)).json()).id).toBe(anew.id);
  });

  it("is brought back by owners only, and by nobody of another team", async () => {
    const { id } = await takenIn(token, [file(3)], fields);
    await deleteEnsemble({ actor: owner, ensembleId: id });
    const other = await makeLab();
    const stranger = { ...owner, userId: other.analyst.id };
    await expect(restoreEnsemble({ actor: analyst, ensembleId: id })).rejects.toMatchObject({
      code: "forbidden",
    });
    await expect(restoreEnsemble({ actor: stranger, ensembleId: id })).rejects.toMatchObject({
      code: "not-found",
    });
    for (const ensembleId of ["no id", "a".repeat(16)]) {
      await expect(restoreEnsemble({ actor: owner, ensembleId })).rejects.toMatchObject({
        code: "not-found",
      });
    }
  });

  it("is not brought back twice", async () => {
    const { id } = await takenIn(token, [file(4)], fields);
    await deleteEnsemble({ actor: owner, ensembleId: id });
    await restoreEnsemble({ actor: owner, ensembleId: id });
    await expect(restoreEnsemble({ actor: owner, ensembleId: id })).rejects.toMatchObject({
      code: "not-found",
    });
  });
});
