import { readFileSync } from "node:fs";
import type { Page } from "@playwright/test";
import { enter, expect, expectAccessible, hydrated, test } from "./base";

/** Four hundred frames of N-butyl-4-methylbenzenesulfonamide with two energies in their fields (fixtures/README.md). */
const tosylamide = readFileSync(
  new URL("../../fixtures/reference/ensembles/tosylamide.sdf", import.meta.url),
  "utf8",
);

/** Takes the file into the analyst's team under titles of its own, and opens a section. */
async function takeIn(page: Page, section: string): Promise<string> {
  const { team, origin } = await enter(page);
  const own = `>  <RUN>\n${process.pid}-${Date.now()}\n\n$$$$\n`;
  const text = tosylamide.replaceAll("$$$$\n", () => own);
  const answer = await page.request.post("/files/upload", {
    headers: { origin },
    multipart: {
      team,
      level: "MMFF94",
      energyUnit: "kcal/mol",
      energyFrom: "field:MMFF94_ENERGY_KCAL_MOL",
      file: { name: "tosylamide.sdf", mimeType: "chemical/x-mdl-sdfile", buffer: Buffer.from(text) },
    },
  });
  expect(answer.status()).toBe(201);
  const { id } = (await answer.json()) as { id: string };
  await page.goto(`/ensembles/${id}/${section}`);
  await hydrated(page);
  return id;
}

/** Picks atoms by their numbers, as the address of the workbench holds them. */
async function pick(page: Page, atoms: string): Promise<void> {
  const address = new URL(page.url());
  address.searchParams.set("at", atoms);
  await page.goto(address.href);
  await hydrated(page);
}

const row = (page: Page, name: RegExp) =>
  page.getByRole("table", { name: "Averages of the properties" }).getByRole("row", { name });

test("a contact and a torsion picked on the structure are averaged by their rules", async ({ page }) => {
  // Six pages one after the other, each with its structures.
  test.slow();
  const id = await takeIn(page, "averages");
  await pick(page, "16,26");
  await page.getByRole("button", { name: "Make it a column" }).click();
  // A methyl group and two ring sides: six pairs, averaged by r^-6 before the conformers are.
  await expect(row(page, /^d H16–H26 \(mean of 6\)/)).toContainText("5.50");
  await expect(page.getByText("An NOE sees d H16–H26 (mean of 6) as 5.50", { exact: false })).toBeVisible();

  await pick(page, "3,4,5,6");
  await page.getByRole("button", { name: "Make it a column" }).click();
  const torsion = row(page, /^torsion C3–C4–N5–S6/);
  await test.step("a column that was made can be taken back, and made again", async () => {
    await expect(torsion).toBeVisible();
    await expect(page.getByText("torsion C3–C4–N5–S6 is a column now.")).toBeVisible();
    await page.getByRole("button", { name: "Undo" }).click();
    await expect(torsion).toHaveCount(0);
    await page.getByRole("button", { name: "Make it a column" }).click();
  });
  await expect(torsion).toContainText("circular, both hands");
  await expect(torsion).toContainText("180");
  await expect(torsion).toContainText("fixed");

  await test.step("another rule gives another figure, and is kept", async () => {
    await page.getByRole("button", { name: "d H16–H26 (mean of 6)", exact: true }).click();
    await page.getByText("linear", { exact: true }).last().click();
    await page.getByRole("button", { name: "Average by linear" }).click();
    // The plain mean over pairs and conformers.
    await expect(row(page, /^d H16–H26 \(mean of 6\)/)).toContainText("6.59");
    await page.reload();
    await expect(row(page, /^d H16–H26 \(mean of 6\)/)).toContainText("linear");
  });

  await test.step("temperatures stand beside each other, and one is added", async () => {
    await page.getByRole("button", { name: "Add a temperature" }).click();
    await page.getByLabel("A further temperature").fill("310");
    await page.getByLabel("A further temperature").press("Enter");
    await expect(page.getByRole("columnheader", { name: "310 K" })).toBeVisible();
    expect(new URL(page.url()).searchParams.get("Ts")).toContain("310");
  });

  await test.step("properties are set beside measured values, kept, and there after a reload", async () => {
    await page.getByText("Set properties beside measured values").click();
    const list = page.getByLabel("A list to take in, a property and a value a line");
    await list.fill("d H16–H26 (mean of 6) 6,5\nnothing 3");
    await page.getByRole("button", { name: "Take the values" }).click();
    await expect(page.getByText("No such property in the table: nothing 3.", { exact: false })).toBeVisible();
    await page.getByRole("button", { name: "Read commas as decimal commas" }).click();
    await expect(list).toHaveValue("nothing 3");
    const beside = page.getByRole("table", { name: "Properties beside measured values" });
    await expect(beside.getByRole("row", { name: /^d H16–H26/ })).toContainText("+0.09");
    await page.getByRole("button", { name: "Keep with the ensemble" }).click();
    await expect(page.getByText(/^1 measured value kept with the ensemble by /)).toBeVisible();
    expect(new URL(page.url()).searchParams.has("measp")).toBe(false);
    await page.reload();
    await expect(page.getByText("Å 1 value, off by 0.09", { exact: false })).toBeVisible();
  });

  await test.step("averages.csv has the same figures", async () => {
    const link = await page.getByRole("link", { name: "averages.csv", exact: true }).getAttribute("href");
    const csv = await (await page.request.get(link ?? "")).text();
    expect(csv.split("\r\n")[0]).toBe("property,unit,rule,average,spread,uncertainty,covered");
    const line = csv.split("\r\n").find((one) => one.includes("torsion C3–C4–N5–S6")) ?? "";
    expect(line).toContain(",circular,180,");
  });

  await expectAccessible(page);

  await test.step("the torsion labels the conformers, and the table can be narrowed to a shape", async () => {
    await page.goto(`/ensembles/${id}/populations`);
    await hydrated(page);
    const filter = page.getByRole("combobox", { name: /^Shape by torsion C3–C4–N5–S6/ });
    const label = await filter.locator("option").nth(1).textContent();
    const [name, count] = /^(.*) \((\d+)\)$/.exec(label ?? "")?.slice(1) ?? ["", "0"];
    await filter.selectOption({ index: 1 });
    await expect(page.getByRole("heading", { name: `${count} of 31 conformers: ${name}` })).toBeVisible();
  });
});

test("without a property the section says what it needs", async ({ page }) => {
  const id = await takeIn(page, "averages");
  await expect(page.getByRole("heading", { name: "Averages", exact: true })).toBeVisible();
  // The file's own fields are properties already; each is averaged.
  await expect(row(page, /UFF_ENERGY_KCAL_MOL/)).toBeVisible();
  await expect(page.getByText("Pick two atoms in the view for a distance", { exact: false })).toBeVisible();

  await test.step("page and section come to be of one sift when another one ended between their reads", async () => {
    const rail = page.getByRole("navigation", { name: "Sections" });
    await rail.getByRole("link", { name: "Populations" }).click();
    await page.waitForURL(/\/populations/);
    const asked = await page.request.post(`/files/ensembles/${id}/sifts`, {
      headers: { origin: new URL(page.url()).origin },
      data: { level: "MMFF94", rmsdTolerance: 0.25 },
    });
    const sift = (await asked.json()) as { id: string };
    await expect
      .poll(async () => (await (await page.request.get(`/files/sifts/${sift.id}?wait=10`)).json()).status)
      .toBe("done");
    await rail.getByRole("link", { name: "Averages" }).click();
    await expect(page.getByText(/RMSD tolerance 0.250?\sÅ/)).toBeVisible();
    await expect(row(page, /UFF_ENERGY_KCAL_MOL/)).toBeVisible();
  });
});

test("trust names what is yours to settle, and follows the error", async ({ page }) => {
  await takeIn(page, "trust");
  // Ten thousand draws in a thread of the browser, behind the sift.
  await expect(page.getByText("c1 and c2 cannot be told apart.")).toBeVisible({ timeout: 30_000 });
  await expect(page.getByText("Two or so shapes are probably missing.")).toBeVisible();
  await expect(page.getByText("hold between 43", { exact: false })).toBeVisible();
  await page.getByLabel("Level error, ±").fill("0.02");
  await page.getByLabel("Level error, ±").press("Enter");
  await expect(
    page.getByText("c1 is the lowest, whatever the level's error", { exact: false }),
  ).toBeVisible();
  await expect(page.getByText("31.5")).toBeVisible();
  await expectAccessible(page);
});

test("both sections read on a phone", async ({ page }) => {
  await page.setViewportSize({ width: 320, height: 700 });
  const id = await takeIn(page, "averages");
  for (const section of ["averages", "trust"]) {
    await page.goto(`/ensembles/${id}/${section}`);
    await hydrated(page);
    const wider = await page.evaluate(
      () => document.documentElement.scrollWidth - document.documentElement.clientWidth,
    );
    expect(wider, section).toBeLessThanOrEqual(0);
  }
});
