import { readFileSync } from "node:fs";
import type { Page } from "@playwright/test";
import {
  enter,
  expect,
  expectAccessible,
  expectAccessibleEverywhere,
  expectNoSideways,
  hydrated,
  openDemo,
  test,
} from "./base";

const difluoroethane = readFileSync(
  new URL("../../fixtures/reference/ensembles/difluoroethane.xyz", import.meta.url),
  "utf8",
);

let count = 0;
/** Six frames of an ensemble of this test alone, on its page of columns. */
async function openColumns(page: Page): Promise<string[]> {
  count += 1;
  const lines = difluoroethane.split("\n");
  const size = Number(lines[0]) + 2;
  const frames = Array.from({ length: 6 }, (_, k) => {
    const [atoms, energy, ...places] = lines.slice(k * size, (k + 1) * size);
    return [atoms, `run ${process.pid}-${Date.now()}-${count} energy=${energy?.trim()}`, ...places].join(
      "\n",
    );
  });
  const { team, origin } = await enter(page);
  const answer = await page.request.post("/files/upload", {
    headers: { origin },
    multipart: {
      team,
      level: "MMFF94",
      energyUnit: "kcal/mol",
      energyFrom: "key:energy",
      file: { name: "six.xyz", mimeType: "chemical/x-xyz", buffer: Buffer.from(frames.join("\n")) },
    },
  });
  expect(answer.status()).toBe(201);
  const { id } = (await answer.json()) as { id: string };
  await page.goto(`/ensembles/${id}/columns`);
  await hydrated(page);
  return frames;
}

const choose = (page: Page, name: string, text: string) =>
  page
    .locator("#add-columns")
    .locator("xpath=ancestor::section[1]")
    .locator("input[type=file]")
    .setInputFiles({ name, mimeType: "text/plain", buffer: Buffer.from(text) });
const rows = (page: Page) => page.getByRole("table", { name: "Columns of the ensemble" }).getByRole("row");

test("a table is looked at, its questions answered, then kept", async ({ page }) => {
  await openColumns(page);
  await choose(
    page,
    "six.csv",
    "frame;cheap [kcal/mol];rg [nm];note\n0;0,3;0,41;a\n1;0,0;0,42;b\n2;1,4;0,43;c\n3;1,1;0,44;d\n4;2,9;0,45;e\n5;2,5;NA;f\n",
  );
  await expect(page.getByRole("heading", { name: "How are numbers written?" })).toBeVisible();
  const add = page.getByRole("button", { name: "Add 2 columns" });
  await expect(add).toBeDisabled();
  await page.getByRole("button", { name: "Use this answer" }).first().click();
  await expect(page.getByText("Numbers: comma")).toBeVisible();
  await expect(page.getByRole("button", { name: "Use this answer" })).toHaveCount(1);
  await page.getByRole("button", { name: "Use this answer" }).click();
  await expect(page.getByText("6 of 6 rows matched by frame number.")).toBeVisible();
  await page.getByLabel("Name of cheap [kcal/mol]").fill("PM7");
  await page.getByLabel("Name of cheap [kcal/mol]").press("Enter");
  await page.getByLabel("Solvent").focus();
  // The file is looked at again with the new name; a button on its way to being enabled has no settled colours.
  await expect(add).toBeEnabled();
  await expectAccessible(page);
  await add.click();
  await expect(rows(page).filter({ hasText: "PM7" })).toContainText("the table six.csv");
  await expect(rows(page).filter({ hasText: /^rg/ })).toContainText("nm");

  // A level becomes a property, and one that is weighed with again.
  await page.getByRole("button", { name: "Change PM7" }).click();
  await page.getByRole("button", { name: "Make it a property" }).click();
  await expect(rows(page).filter({ hasText: "PM7" })).toContainText("property, linear");
  await page.getByRole("button", { name: "Use PM7 as a level" }).click();
  await expect(page.getByRole("dialog")).toContainText("6 accepted frames with a value");
  await expect(page.getByLabel("Unit of the numbers")).toHaveValue("kcal/mol");
  await expect(page.getByLabel("Unit of the numbers")).toContainText("kcal/mol, a spread of 2.90 kcal/mol");
  await page.getByRole("dialog").getByRole("button", { name: "Use as a level" }).click();
  await expect(rows(page).filter({ hasText: "PM7" })).toContainText("electronic");
  await expect(page.getByRole("dialog")).toHaveCount(0);
});

test("a second structure file in another order becomes a level, and a formula another", async ({ page }) => {
  const frames = await openColumns(page);
  const second = [...frames].reverse().map((one, k) => one.replace(/run .*/, `energy=${k}.25`));
  await choose(page, "second.xyz", second.join("\n"));
  await page.getByLabel("Name of the level of theory").fill("UFF");
  await page.getByRole("button", { name: "Name the level" }).click();
  await page.getByText("kJ/mol", { exact: true }).first().click();
  await page.getByRole("button", { name: "Use this answer" }).click();
  await expect(page.getByText("6 of 6 frames of the file matched, 6 by equal coordinates.")).toBeVisible();
  await page.getByRole("button", { name: "Add 1 column" }).click();
  await expect(rows(page).filter({ hasText: "UFF" })).toContainText("kJ/mol");

  await page.getByLabel("Formula").fill("MMFF94 + 3");
  await expect(page.getByText(/cannot be added or subtracted/)).toBeVisible();
  await page.getByLabel("Formula").fill("MMFF94 + (UFF - MMFF94)");
  await expect(page.getByText(/A level, electronic, in kcal\/mol, for 6 of 6 accepted frames/)).toBeVisible();
  await page.getByLabel("Name of the new column").fill("mixed");
  await page.getByRole("button", { name: "Add the computed column" }).click();
  await expect(rows(page).filter({ hasText: "mixed" })).toContainText("MMFF94 + (UFF - MMFF94)");

  await page.getByRole("button", { name: "Change mixed" }).click();
  await page.getByLabel("Kind of energy").selectOption("free");
  await page.getByLabel("Temperature, of a free energy or an enthalpy").fill("310");
  await page.getByRole("button", { name: "Keep the changes" }).click();
  await expect(rows(page).filter({ hasText: "mixed" })).toContainText("free energy at 310");
  await page.getByRole("button", { name: "Change mixed" }).click();
  await page.getByRole("button", { name: "Remove the column" }).click();
  await expect(rows(page).filter({ hasText: "mixed" })).toHaveCount(0);
  await page.getByRole("button", { name: "Undo" }).last().click();
  await expect(rows(page).filter({ hasText: "mixed" })).toHaveCount(1);
});

test("a reader sees the columns and no way to change them", async ({ page }) => {
  await openDemo(page, "N-Acetyl-L-alanine N-methylamide", "columns", "reader");
  await expect(page.getByText("An analyst or an owner of the team adds levels and tables.")).toBeVisible();
  await expect(page.getByRole("button", { name: /^Change / })).toHaveCount(0);
  await expectAccessibleEverywhere(page, "the columns");
  await expect(page.getByText("An analyst or an owner of the team adds levels and tables.")).toBeVisible();
  await expect(page.getByRole("button", { name: /^Change / })).toHaveCount(0);
  await page.setViewportSize({ width: 320, height: 900 });
  await expectNoSideways(page, "the columns at 320 px");
});
