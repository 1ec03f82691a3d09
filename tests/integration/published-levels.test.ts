import { readFileSync } from "node:fs";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { beside, besidePresent } from "../factories/reference";
import { formOf, makeLab, sifted, takenIn, withJobs } from "../factories/upload";
import { call } from "../setup/app";

// Published energies and geometries: alkanes, J. Phys. Chem. A 2009, 113, 11974; cysteine, J. Chem. Theory Comput. 2009,
// 5, 1511. They lie beside the checkout with statistics computed by numpy and scipy 1.10.1, or nowhere; the table of
// levels counts conformers from 0 and is written in the form of the API here.

/** The stored figures carry 9 to 10 digits. */
const TOLERANCE = 2e-7;

interface Deviations {
  msd: number;
  mad: number;
  rmsd: number;
  max_abs: number;
}
interface Expected {
  levels: string[];
  comparisons_A_vs_B: {
    A: string;
    B: string;
    n: number;
    own_minimum_reference: Deviations;
    common_reference: Deviations;
    pearson_r: number;
    spearman_rho: number;
    kendall_tau_b: number;
    temperatures: {
      T_K: number;
      population_overlap: number;
      window_at_A_keeping_B_population_kcal_mol: Record<string, number>;
    }[];
  }[];
  weighted_dipole_debye: {
    property_level: string;
    population_level: string;
    T_K: number;
    mean: number;
    population_sd: number;
  }[];
}

interface Comparison extends Omit<Deviations, "max_abs"> {
  n: number;
  max: number;
  pearson: number | null;
  spearman: number | null;
  kendall: number | null;
  populationOverlap: number;
  window: { share: number; kcal: number; count: number }[];
}

/** Rows of the table; names of conformers stand in quotes where they hold commas. */
function rowsOf(text: string): string[][] {
  return text
    .trim()
    .split("\n")
    .map((line) =>
      Array.from(line.matchAll(/("[^"]*"|[^,]*)(?:,|$)/g), ([, cell = ""]) => cell).slice(0, -1),
    );
}

/** `published_rel_kcal_mol` of conformer 0 becomes `published [kcal/mol]` of frame 1; the level of the file itself is left out. */
function tableFor(molecule: string, wanted: RegExp): string {
  const [head = [], ...rows] = rowsOf(readFileSync(`${beside}${molecule}.levels.csv`, "utf8"));
  const columns = head.flatMap((name, at) => {
    const match = wanted.exec(name);
    return match ? [{ name: match[1], unit: match[2]?.replace("kcal_mol", "kcal/mol"), at }] : [];
  });
  const header = ["frame", ...columns.map(({ name, unit }) => `${name} [${unit}]`)].join(",");
  return [header, ...rows.map((row, k) => [k + 1, ...columns.map(({ at }) => row[at])].join(","))].join("\n");
}

const MOLECULES = [
  "alkane-conformers/pentane",
  "alkane-conformers/hexane",
  "cysteine-conformers/cysteine",
] as const;

describe("levels of published conformers, brought in as a table", () => {
  let lab: Awaited<ReturnType<typeof makeLab>>;
  let jobs: Awaited<ReturnType<typeof withJobs>>;
  const ids = new Map<string, string>();

  beforeAll(async () => {
    if (!besidePresent) return;
    jobs = await withJobs();
    lab = await makeLab("Published");
    for (const molecule of MOLECULES) {
      const content = readFileSync(`${beside}${molecule}.mmff94.xyz`);
      const name = `${molecule.split("/")[1]}.xyz`;
      const fields = { level: "mmff94", energyUnit: "kcal/mol" };
      const { id } = await takenIn(lab.token, [{ name, content }], fields);
      ids.set(molecule, id);
      for (const wanted of [/^(published)_rel_(kcal_mol)$/, /^(.*)_(hartree)$/, /^(.*_dipole)_(debye)$/]) {
        const body = formOf([{ name: "levels.csv", content: tableFor(molecule, wanted) }]);
        const path = `/api/v1/ensembles/${id}/columns`;
        const added = await call(path, { method: "POST", token: lab.token, body });
        if (added.status !== 201) throw new Error(await added.text());
      }
    }
  }, 120_000);
  afterAll(() => jobs?.stop());

  const expectedOf = (molecule: string) =>
    JSON.parse(readFileSync(`${beside}${molecule}.expected.json`, "utf8")) as Expected;
  const near = (found: number | null, wanted: number, what: string) =>
    expect(Math.abs((found ?? Number.NaN) - wanted), what).toBeLessThan(TOLERANCE);

  it.for(MOLECULES)("%s: every pair of levels as computed independently", async (molecule, { skip }) => {
    skip(!besidePresent, "not laid beside the checkout");
    const id = ids.get(molecule);
    const { comparisons_A_vs_B: pairs } = expectedOf(molecule);
    expect(pairs.length).toBe(20);
    for (const pair of pairs) {
      for (const at of pair.temperatures) {
        for (const [align, key] of [
          ["own-minimum", "own_minimum_reference"],
          ["common", "common_reference"],
        ] as const) {
          const query = new URLSearchParams({
            level: pair.A,
            reference: pair.B,
            temperature: String(at.T_K),
            align,
          });
          const answer = await call(`/api/v1/ensembles/${id}/comparison?${query}`, { token: lab.token });
          expect(answer.status).toBe(200);
          const found = (await answer.json()) as Comparison;
          const what = `${pair.A} against ${pair.B}, ${align}, ${at.T_K} K`;
          expect(found.n, what).toBe(pair.n);
          near(found.msd, pair[key].msd, what);
          near(found.mad, pair[key].mad, what);
          near(found.rmsd, pair[key].rmsd, what);
          near(found.max, pair[key].max_abs, what);
          near(found.pearson, pair.pearson_r, what);
          near(found.spearman, pair.spearman_rho, what);
          near(found.kendall, pair.kendall_tau_b, what);
          near(found.populationOverlap, at.population_overlap, what);
          for (const { share, kcal } of found.window) {
            near(kcal, at.window_at_A_keeping_B_population_kcal_mol[String(share)] ?? Number.NaN, what);
          }
        }
      }
    }
  });

  it("cysteine: dipole moments weighted by the energies of each level", async ({ skip }) => {
    skip(!besidePresent, "not laid beside the checkout");
    const molecule = "cysteine-conformers/cysteine";
    const sift = await sifted(lab.token, ids.get(molecule) ?? "", { level: "mmff94", atoms: "all" });
    // Eleven shapes without symmetry of their own: every copy counts once, as in the stored means.
    expect(sift.result?.kept).toHaveLength(11);
    const wanted = expectedOf(molecule).weighted_dipole_debye;
    expect(wanted.length).toBe(30);
    for (const { property_level, population_level, T_K, mean, population_sd } of wanted) {
      const query = new URLSearchParams({ temperature: String(T_K), level: population_level });
      const file = await call(`/api/v1/sifts/${sift.id}/averages.csv?${query}`, { token: lab.token });
      const row = rowsOf(await file.text()).find(([name]) => name === `${property_level}_dipole`);
      const what = `${property_level} at ${population_level}, ${T_K} K`;
      near(Number(row?.[3]), mean, what);
      near(Number(row?.[4]), population_sd, what);
    }
  });

  it("cysteine: tells that MMFF94 prefers another conformer than the published energies", async ({
    skip,
  }) => {
    skip(!besidePresent, "not laid beside the checkout");
    const id = ids.get("cysteine-conformers/cysteine");
    const page = await call(`/ensembles/${id}/levels`, { cookie: lab.analyst.cookie });
    const text = (await page.text()).replaceAll("\u00a0", " ").replaceAll("<!-- -->", "");
    expect(text).toContain("mmff94 puts the lowest conformer of published, c2, 2nd, 0.40 kcal/mol up");
    expect(text).toContain("and prefers c1, which holds 2 % at published");
  });
});
