import { readFileSync } from "node:fs";
import { eq } from "drizzle-orm";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { db, inTransaction } from "~/db/client.server";
import { columns, logbook } from "~/db/schema.server";
import type { EnsembleAnswer } from "~/lib/api/schemas";
import { averageOf } from "~/lib/averages/average";
import { averageErrorsOf, propertyMoments } from "~/lib/averages/property-set";
import { DEFAULT_SEED } from "~/lib/averages/uncertainty";
import { angle, distance, torsion } from "~/lib/measure/geometry";
import { distinctPopulations } from "~/lib/thermo/populations";
import type { SiftView } from "~/lib/views";
import type { Actor } from "~/services/auth/access.server";
import { keepMeasured } from "~/services/averages/keep-measured.server";
import { keepMeasuredProperties } from "~/services/averages/keep-measured-properties.server";
import { loadAverages } from "~/services/averages/load-averages.server";
import { loadTrust } from "~/services/averages/load-trust.server";
import { addObservable, observableRequestSchema } from "~/services/averages/observe.server";
import { recomputeObservables } from "~/services/averages/recompute-observables.server";
import { setRule } from "~/services/averages/set-rule.server";
import { joinAtoms, splitAtoms } from "~/services/averages/split-atoms.server";
import { lockEnsemble, storeColumn } from "~/services/columns/store-column.server";
import { computeAverages } from "~/services/jobs/pool.server";
import { makeMember } from "../factories/people";
import { fixtures, readReference } from "../factories/reference";
import { makeLab, reference, sifted, takenIn, withJobs } from "../factories/upload";
import { call } from "../setup/app";

// Averages through the API and the services of the page, on a real ensemble with independently computed means.

const NAME = "ac-ala-nhme";
let jobs: { stop(): Promise<void> };
let lab: Awaited<ReturnType<typeof makeLab>>;
let ensemble: EnsembleAnswer;
let sift: SiftView;
let analyst: Actor;
const set = readReference(`ensembles/${NAME}.xyz`, `ensembles/${NAME}`);
const frames = set.frames.block;

beforeAll(async () => {
  jobs = await withJobs();
  lab = await makeLab();
  analyst = { kind: "user", userId: lab.analyst.id, sessionId: "a".repeat(16) };
  ensemble = await takenIn(
    lab.token,
    [{ name: `${NAME}.xyz`, content: reference(`ensembles/${NAME}.xyz`) }],
    {
      level: "MMFF94",
      energyUnit: "kcal/mol",
    },
  );
  sift = await sifted(lab.token, ensemble.id, {
    level: "MMFF94",
    energyTolerance: 0.06,
    rmsdTolerance: 0.2,
    atoms: "heavy",
    mirror: "keep",
  });
}, 120_000);

afterAll(() => jobs.stop());

async function store(
  name: string,
  unit: string | null,
  values: readonly (number | null)[],
  more: { rule?: "linear" | "r-6" | "circular"; quantity?: string; atom?: number } = {},
) {
  const at = { teamId: lab.team.id, ensembleId: ensemble.id, userId: lab.analyst.id };
  return inTransaction(async (tx) => {
    await lockEnsemble(tx, at);
    return storeColumn(tx, at, {
      name,
      kind: "property",
      unit,
      origin: "table:test.csv",
      data: {
        values: Float64Array.from(values, (value) => value ?? 0),
        present: Uint8Array.from(values, (value) => (value === null ? 0 : 1)),
      },
      ...more,
    });
  });
}

/** Cells of a line after RFC 4180; no name here holds a line end. */
const cellsOf = (line: string) =>
  [...line.matchAll(/(?:^|,)(?:"((?:[^"]|"")*)"|([^,]*))/g)].map(([, quoted, plain]) =>
    quoted === undefined ? (plain ?? "") : quoted.replaceAll('""', '"'),
  );

async function csv(query = ""): Promise<Map<string, Record<string, string>>> {
  const answer = await call(`/api/v1/sifts/${sift.id}/averages.csv${query}`, { token: lab.token });
  expect(answer.status).toBe(200);
  expect(answer.headers.get("content-type")).toBe("text/csv; charset=utf-8");
  const [head = [], ...lines] = (await answer.text()).trimEnd().split("\r\n").map(cellsOf);
  expect(head.join()).toBe("property,unit,rule,average,spread,uncertainty,covered");
  return new Map(
    lines.map((cells) => [cells[0] ?? "", Object.fromEntries(head.map((name, k) => [name, cells[k] ?? ""]))]),
  );
}

describe("averages.csv", () => {
  it("of an ensemble without properties is its header", async () => {
    expect((await csv()).size).toBe(0);
  });

  it("gives means and spreads of the reference program, for both weightings and temperatures", async () => {
    const [head, ...lines] = readFileSync(`${fixtures}ensembles/${NAME}.properties.csv`, "utf8")
      .trim()
      .split("\n");
    for (const [k, name] of head!.split(",").entries()) {
      if (k > 0)
        await store(
          name,
          "Å",
          lines.map((line) => Number(line.split(",")[k])),
        );
    }
    const expected: {
      property: string;
      weights: string;
      T_K: number;
      mean: number;
      population_sd: number;
    }[] = JSON.parse(readFileSync(`${fixtures}ensembles/${NAME}.expected.json`, "utf8")).weighted_properties;
    for (const one of expected) {
      const rows = await csv(`?temperature=${one.T_K}&weights=${one.weights}`);
      const row = rows.get(one.property)!;
      expect(row).toMatchObject({ unit: "Å", rule: "linear", uncertainty: "", covered: "1" });
      expect(Math.abs(Number(row.average) - one.mean)).toBeLessThan(1e-8);
      expect(Math.abs(Number(row.spread) - one.population_sd)).toBeLessThan(1e-8);
    }
  });

  it("adds the uncertainty that the level's error makes, the same digits each time", async () => {
    const first = await csv("?sigma=0.5");
    const again = await csv("?sigma=0.5");
    expect(Number(first.get("radius_of_gyration_A")!.uncertainty)).toBeGreaterThan(0.001);
    expect([...again]).toEqual([...first]);
    expect(Number((await csv("?sigma=0")).get("radius_of_gyration_A")!.uncertainty)).toBeLessThan(1e-12);
  });

  it("leaves out missing values, and refuses below 90 % covered", async () => {
    const kept = sift.result!.kept.map(({ frame }) => frame);
    const some = (without: number[]) =>
      Array.from({ length: frames.count }, (_, k) => (without.includes(k + 1) ? null : 2));
    await store("nearly all", null, some([kept.at(-1)!]));
    await store("too few", null, some([kept[0]!]));
    const rows = await csv();
    expect(rows.get("nearly all")!.average).toBe("2");
    expect(Number(rows.get("nearly all")!.covered)).toBeLessThan(1);
    expect(rows.get("too few")).toMatchObject({ average: "", spread: "" });
    expect(Number(rows.get("too few")!.covered)).toBeLessThan(0.9);
  });

  it("turns angles by their unit, and gives no uncertainty without an error", async () => {
    const kept = sift.result!.kept.map(({ frame }) => frame);
    const radians = Array.from({ length: frames.count }, (_, k) =>
      kept.indexOf(k + 1) % 2 === 0 ? 3.1 : -3.1,
    );
    await store("phi in radians", "rad", radians, { rule: "circular" });
    const degrees = radians.map((value) => (value * 180) / Math.PI);
    await store("phi in degrees", "°", degrees, { rule: "circular" });
    const rows = await csv("?sigma=0");
    const [rad, deg] = [rows.get("phi in radians")!, rows.get("phi in degrees")!];
    expect(rad).toMatchObject({ unit: "rad", rule: "circular", uncertainty: "0" });
    expect(deg.uncertainty).toBe("0");
    expect(Math.abs(Number(rad.average))).toBeGreaterThan(3.09);
    expect(Number(rad.spread)).toBeLessThan(0.05);
    expect((Number(rad.average) * 180) / Math.PI).toBeCloseTo(Number(deg.average), 9);
    expect((Number(rad.spread) * 180) / Math.PI).toBeCloseTo(Number(deg.spread), 9);
  });

  it("merges per-atom columns over equivalent atoms, one row a column", async () => {
    const methyl = [...set.graph.elements.keys()].find((atom) => {
      const at = set.graph.neighbours.subarray(set.graph.offsets[atom]!, set.graph.offsets[atom + 1]!);
      return (
        set.graph.elements[atom] === 6 && [...at].filter((b) => set.graph.elements[b] === 1).length === 3
      );
    })!;
    const hydrogens = [
      ...set.graph.neighbours.subarray(set.graph.offsets[methyl]!, set.graph.offsets[methyl + 1]!),
    ].filter((b) => set.graph.elements[b] === 1);
    for (const [k, atom] of hydrogens.entries()) {
      await store(`shift H${atom + 1}`, "ppm", new Array(frames.count).fill(k + 1), {
        quantity: "shift",
        atom: atom + 1,
      });
    }
    const rows = await csv();
    for (const atom of hydrogens) expect(rows.get(`shift H${atom + 1}`)!.average).toBe("2");
  });

  it("says what is not right, and what is not there", async () => {
    for (const query of ["?sigma=-1", "?sigma=x", "?temperature=0", "?weights=best", "?level=none"]) {
      const answer = await call(`/api/v1/sifts/${sift.id}/averages.csv${query}`, { token: lab.token });
      expect(answer.status, query).toBe(422);
      expect((await answer.json()).errors[0].field).toBe(query.slice(1).split("=")[0]);
    }
    const unweighed = await sifted(lab.token, ensemble.id, { level: null });
    const answer = await call(`/api/v1/sifts/${unweighed.id}/averages.csv`, { token: lab.token });
    expect(answer.status).toBe(422);
  });
});

describe("observables picked on the structure", () => {
  const ask = (request: object) =>
    addObservable({
      actor: analyst,
      ensembleId: ensemble.id,
      request: observableRequestSchema.parse(request),
    });
  const stored = async (id: string) => {
    const rows = await db.select().from(columns).where(eq(columns.id, id));
    return rows[0]!;
  };
  const structure = (k: number) => frames.positions.subarray(66 * k, 66 * (k + 1));
  const value = (data: Buffer, k: number) => data.readDoubleLE(8 * k);

  it("become columns with their value in every frame", async () => {
    const torsionColumn = await stored((await ask({ observable: "torsion", atoms: [1, 2, 4, 5] })).id);
    const distanceColumn = await stored(
      (await ask({ observable: "distance", atoms: [1, 5], merge: false, rule: "linear" })).id,
    );
    const angleColumn = await stored((await ask({ observable: "angle", atoms: [1, 2, 4] })).id);
    expect(torsionColumn).toMatchObject({ rule: "circular", unit: "°", count: 300, origin: "observable" });
    expect(angleColumn).toMatchObject({ rule: "linear", unit: "°" });
    for (const k of [0, 150, 299]) {
      expect(value(torsionColumn.data, k)).toBeCloseTo(torsion(structure(k), 0, 1, 3, 4)!, 9);
      expect(value(distanceColumn.data, k)).toBeCloseTo(distance(structure(k), 0, 4), 9);
      expect(value(angleColumn.data, k)).toBeCloseTo(angle(structure(k), 0, 1, 3)!, 9);
    }
    expect((await csv()).get(torsionColumn.name)!.rule).toBe("circular");
  });

  it("are of these very atoms where equivalent ones are not wanted, and say so in their definition", async () => {
    const hydrogen = [...set.graph.elements.keys()].filter((atom) => set.graph.elements[atom] === 1);
    // The first hydrogen is one of a methyl group; two carbons stand for themselves alone.
    const many = await ask({
      observable: "distance",
      atoms: [hydrogen[0]! + 1, 6],
      merge: false,
      rule: "linear",
      name: "one of three",
    });
    const one = await ask({
      observable: "distance",
      atoms: [1, 2],
      merge: false,
      rule: "linear",
      name: "C1 C2",
    });
    expect((await stored(many.id)).definition).toMatchObject({ parameters: { numbered: "file" } });
    expect((await stored(one.id)).definition).not.toMatchObject({ parameters: { numbered: "file" } });
    const column = await stored(many.id);
    for (const k of [0, 150, 299])
      expect(value(column.data, k)).toBeCloseTo(distance(structure(k), hydrogen[0]!, 5), 9);
  });

  it("are merged over a methyl group, and computed again when the rule changes", async () => {
    const hydrogen = [...set.graph.elements.keys()].filter((atom) => set.graph.elements[atom] === 1);
    const made = await ask({ observable: "distance", atoms: [hydrogen[0]! + 1, 6], rule: "r-6" });
    const before = await stored(made.id);
    expect(before.definition).toMatchObject({ type: "observable", observable: "distance" });
    if (before.definition?.type !== "observable") throw new Error("no observable");
    const pairs = before.definition.atoms;
    expect(pairs).toHaveLength(3);
    const mean = pairs.reduce((sum, [i, j]) => sum + distance(structure(7), i! - 1, j! - 1) ** -6, 0) / 3;
    expect(value(before.data, 7)).toBeCloseTo(mean ** (-1 / 6), 9);
    await setRule({ actor: analyst, ensembleId: ensemble.id, columnId: made.id, rule: "linear" });
    const after = await stored(made.id);
    expect(after.rule).toBe("linear");
    const plain = pairs.reduce((sum, [i, j]) => sum + distance(structure(7), i! - 1, j! - 1), 0) / 3;
    expect(value(after.data, 7)).toBeCloseTo(plain, 9);
    await inTransaction((tx) => recomputeObservables(tx, ensemble.id));
    expect((await stored(made.id)).dataSha!.equals(after.dataSha!)).toBe(true);
  });

  it("are refused in words where they do not fit", async () => {
    await expect(ask({ observable: "distance", atoms: [1, 99] })).rejects.toThrow("22 atoms");
    await expect(ask({ observable: "torsion", atoms: [1, 2, 3] })).rejects.toThrow("takes 4");
    await expect(ask({ observable: "coupling", atoms: [1, 2, 4, 5], set: "h-c-c-h" })).rejects.toThrow(
      "does not fit",
    );
    await expect(ask({ observable: "coupling", atoms: [1, 2, 4, 5] })).rejects.toThrow("parameter set");
    await expect(ask({ observable: "torsion", atoms: [1, 2, 4, 5] })).rejects.toThrow("already");
  });

  it("are not for readers", async () => {
    await expect(
      addObservable({
        actor: { kind: "anonymous" },
        ensembleId: ensemble.id,
        request: observableRequestSchema.parse({ observable: "distance", atoms: [1, 2] }),
      }),
    ).rejects.toMatchObject({ code: "not-found" });
  });
});

describe("what people say of averages", () => {
  const person = () => ({ actor: analyst, ensembleId: ensemble.id });
  const shifts = async () =>
    [...(await csv())].filter(([name]) => name.startsWith("shift H")).map(([, row]) => Number(row.average));
  const seen = () => loadAverages({ ...person(), siftId: sift.id });
  const atomsOfShift = async () => {
    const { properties } = await seen();
    const [first] = properties.filter(({ quantity }) => quantity === "shift");
    return first!.atoms!.map((atom) => atom + 1) as [number, number, number];
  };

  it("takes a group apart and puts it together again, in every average and in the logbook", async () => {
    const [a, b, c] = await atomsOfShift();
    await splitAtoms({ ...person(), parts: [[b, c], [a]] });
    const apart = await shifts();
    for (const [k, value] of [1, 2.5, 2.5].entries()) expect(apart[k]).toBeCloseTo(value, 12);
    const { said, properties } = await seen();
    expect(said).toMatchObject({ version: 1, splits: [{ parts: [[a], [b, c]], by: expect.any(String) }] });
    const groups = properties
      .filter(({ quantity }) => quantity === "shift")
      .map(({ atoms }) => atoms!.length);
    expect(groups).toEqual([1, 2, 2]);
    await joinAtoms({ ...person(), atom: c });
    for (const value of await shifts()) expect(value).toBeCloseTo(2, 12);
    const rows = await db.select().from(logbook).where(eq(logbook.ensembleId, ensemble.id));
    expect(rows.map(({ type }) => type)).toEqual(expect.arrayContaining(["atoms-split", "atoms-joined"]));
  });

  it("refuses parts that make no sense, and whoever may not compute", async () => {
    const [a, b] = await atomsOfShift();
    const carbon = [...set.graph.elements.keys()].find((atom) => set.graph.elements[atom] === 6)! + 1;
    for (const parts of [[[a]], [[a], []], [[a], [a]], [[a], [999]], [[a], [Number.NaN]]]) {
      await expect(splitAtoms({ ...person(), parts }), String(parts)).rejects.toMatchObject({
        code: "invalid",
      });
    }
    await expect(splitAtoms({ ...person(), parts: [[a], [carbon]] })).rejects.toThrow("no equivalent atoms");
    const reader = await makeMember(lab.team.id, "reader");
    const asReader: Actor = { kind: "user", userId: reader.id, sessionId: "r".repeat(16) };
    await expect(
      splitAtoms({ actor: asReader, ensembleId: ensemble.id, parts: [[a], [b]] }),
    ).rejects.toMatchObject({ code: "forbidden" });
  });

  it("keeps measured values with who said them, and never over what somebody else changed", async () => {
    const [a] = await atomsOfShift();
    const record = (values: [number, number][]) =>
      JSON.stringify({ quantity: "shift", are: null, values, scaling: [], swapped: [] });
    const { version } = (await seen()).said;
    await keepMeasured({ ...person(), record: record([[a, 2.1]]), version });
    expect((await seen()).said.measured).toMatchObject([
      { quantity: "shift", values: [[a, 2.1]], by: expect.any(String) },
    ]);
    await expect(keepMeasured({ ...person(), record: record([[a, 3]]), version })).rejects.toMatchObject({
      code: "conflict",
    });
    for (const wrong of [
      "{",
      "[]",
      record([[a, 1e300]]),
      record([[999, 1]]),
      record([
        [a, 1],
        [a, 2],
      ]),
    ]) {
      await expect(
        keepMeasured({ ...person(), record: wrong, version: version + 1 }),
        wrong,
      ).rejects.toMatchObject({ code: "invalid" });
    }
    await keepMeasured({ ...person(), record: record([]), version: version + 1 });
    expect((await seen()).said.measured).toEqual([]);
    const rows = await db.select().from(logbook).where(eq(logbook.ensembleId, ensemble.id));
    const told = rows.filter(({ type }) => type === "measured-kept").map(({ data }) => data);
    expect(told).toMatchObject([
      { count: 1, changes: [{ before: null, after: "2.1" }] },
      { count: 0, changes: [{ before: "2.1", after: null }] },
    ]);
  });

  it("keeps measured values of properties by their names, and refuses what is no property", async () => {
    const { said, properties } = await seen();
    const name = properties.find(({ quantity }) => quantity === null)!.name;
    const keep = (values: unknown, version = said.version) =>
      keepMeasuredProperties({ ...person(), record: JSON.stringify({ values }), version });
    await keep([[name, 1.85]]);
    const kept = (await seen()).said;
    expect(kept.properties).toMatchObject({ values: [[name, 1.85]], by: expect.any(String) });
    expect(kept).toMatchObject({ version: said.version + 1, splits: said.splits, measured: said.measured });
    await expect(keep([[name, 2]])).rejects.toMatchObject({ code: "conflict" });
    for (const wrong of [
      null,
      [["nowhere", 1]],
      [[name, 1e6]],
      [[name, "1"]],
      [[`${properties.find(({ quantity }) => quantity === "shift")!.name}`, 1]],
      [
        [name, 1],
        [name, 2],
      ],
    ]) {
      await expect(keep(wrong, kept.version), JSON.stringify(wrong)).rejects.toMatchObject({
        code: "invalid",
      });
    }
    // The same again changes nothing, whoever's page it comes from.
    await keep([[name, 1.85]], 0);
    expect((await seen()).said.version).toBe(kept.version);
    await keep([], kept.version);
    expect((await seen()).said.properties).toBeNull();
    const rows = await db.select().from(logbook).where(eq(logbook.ensembleId, ensemble.id));
    const told = rows.flatMap(({ type, data }) => (type === "measured-kept" ? [data] : []));
    expect(told.slice(-2)).toMatchObject([
      { quantity: "properties", count: 1, changes: [{ what: name, before: null, after: "1.85" }] },
      { quantity: "properties", count: 0, changes: [{ what: name, before: "1.85", after: null }] },
    ]);
    const reader = await makeMember(lab.team.id, "reader");
    const asReader: Actor = { kind: "user", userId: reader.id, sessionId: "m".repeat(16) };
    await expect(
      keepMeasuredProperties({
        ...{ actor: asReader, ensembleId: ensemble.id },
        record: JSON.stringify({ values: [[name, 1]] }),
        version: 0,
      }),
    ).rejects.toMatchObject({ code: "forbidden" });
  });
});

describe("what the pages show", () => {
  it("hands values over the conformers to the page, equivalent atoms merged, which then averages as the file does", async () => {
    const view = await loadAverages({ actor: analyst, ensembleId: ensemble.id, siftId: sift.id });
    const kept = sift.result!.kept;
    expect(view.total).toBe(view.properties.length);
    expect(view.properties.every(({ values }) => values.length === kept.length)).toBe(true);
    const shift = view.properties.filter(({ quantity }) => quantity === "shift");
    expect(shift).toHaveLength(3);
    expect(shift[0]!.atoms).toHaveLength(3);
    expect(new Set(shift.flatMap(({ values }) => values))).toEqual(new Set([2]));
    // The browser's figures are the file's, digit by digit.
    const rows = await csv("?temperature=310&sigma=0.5");
    const weighed = distinctPopulations(kept, "electronic", 310)!;
    const moments = view.properties.map((property) => propertyMoments(property, kept, false));
    const { errors } = averageErrorsOf(
      moments,
      {
        energies: kept.map((conformer) => conformer.relativeEnergy!),
        weights: weighed.weights.values,
        temperatureK: 310,
      },
      { sigma: 0.5, seed: DEFAULT_SEED },
    );
    for (const [k, property] of view.properties.entries()) {
      const average = averageOf(moments[k]!, weighed.populations);
      const row = rows.get(property.name)!;
      expect(row.average).toBe(average.value === null ? "" : String(average.value));
      expect(row.uncertainty).toBe(average.value === null ? "" : String(errors[k]!.sd));
    }
  });

  it("draws the same digits in a thread, where large sets are drawn", async () => {
    const view = await loadAverages({ actor: analyst, ensembleId: ensemble.id, siftId: sift.id });
    const kept = sift.result!.kept;
    const moments = view.properties.map((property) => propertyMoments(property, kept, false));
    const weighed = {
      energies: Float64Array.from(kept, (conformer) => conformer.relativeEnergy!),
      weights: Float64Array.from(distinctPopulations(kept, "electronic", 310)!.weights.values),
      temperatureK: 310,
    };
    const error = { sigma: 0.5, seed: DEFAULT_SEED };
    const { errors, draws } = await computeAverages({ moments, weighed, error });
    expect({ errors, draws }).toEqual(averageErrorsOf(moments, weighed, error));
  });

  it("says which frames each search brought", async () => {
    const { searches } = await loadTrust({ actor: analyst, ensembleId: ensemble.id });
    expect(searches).toEqual([{ name: `${NAME}.xyz`, ranges: [[1, 300]] }]);
  });

  it("reads without script: the finding, the table, and what is yours to settle", async () => {
    const page = async (section: string) => {
      const answer = await call(`/ensembles/${ensemble.id}/${section}?sift=${sift.id}`, {
        cookie: lab.analyst.cookie,
      });
      expect(answer.status).toBe(200);
      return answer.text();
    };
    const averages = await page("averages");
    expect(averages).toContain("radius_of_gyration_A");
    expect(averages).toContain("of the shapes");
    const trust = await page("trust");
    expect(trust).toContain("yours to settle");
    expect(trust).toContain("nothing to do");
    expect(await page("populations")).toContain("Shape by torsion");
  });

  it("refuses an act of a reader and of a form that does not fit, in words", async () => {
    const reader = await makeMember(lab.team.id, "reader");
    const send = (cookie: string, form: Record<string, string>) =>
      call(`/ensembles/${ensemble.id}/averages`, { cookie, form });
    const refused = await send(reader.cookie, { intent: "observe", observable: "distance", atoms: "1,2" });
    expect(await refused.text()).toContain("analyst or owner");
    const wrong = await send(lab.analyst.cookie, { intent: "observe", observable: "distance", atoms: "1,x" });
    expect(wrong.status).toBe(400);
    const unknown = await send(lab.analyst.cookie, { intent: "rule", column: "a".repeat(16), rule: "r-6" });
    expect(unknown.status).toBe(404);
  });
});
