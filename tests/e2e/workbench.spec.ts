import { readFileSync } from "node:fs";
import type { Page } from "@playwright/test";
import { enter, expect, expectAccessible, expectNoSideways, hydrated, openDemo, test } from "./base";

/** Two hundred frames of 1,2-difluoroethane; three minima, the gauche pair below anti (fixtures/README.md). */
const difluoroethane = readFileSync(
  new URL("../../fixtures/reference/ensembles/difluoroethane.xyz", import.meta.url),
  "utf8",
);

/** The file with comments that no other test has, so that no two tests share an ensemble. */
function ownFile(comment: (energy: string, frame: number) => string): string {
  const lines = difluoroethane.split("\n");
  const atoms = Number(lines[0]);
  for (let frame = 0, at = 1; at < lines.length; frame++, at += atoms + 2) {
    lines[at] = comment((lines[at] ?? "").trim(), frame + 1);
  }
  return lines.join("\n");
}

/** Takes a file into the analyst's team and opens a section of its ensemble. */
async function takeIn(page: Page, text: string, answers: Record<string, string>, section: string) {
  const { team, origin } = await enter(page);
  const answer = await page.request.post("/files/upload", {
    headers: { origin },
    multipart: {
      team,
      ...answers,
      file: { name: "search.xyz", mimeType: "chemical/x-xyz", buffer: Buffer.from(text) },
    },
  });
  expect(answer.status()).toBe(201);
  const { id } = (await answer.json()) as { id: string };
  await page.goto(`/ensembles/${id}/${section}`);
  await hydrated(page);
  return id;
}

const ANSWERED = { level: "MMFF94", energyUnit: "kcal/mol", energyFrom: "key:energy" };
let count = 0;
const named = () => {
  const run = `${process.pid}-${Date.now()}-${count++}`;
  return ownFile((energy, frame) => `run ${run} frame ${frame} energy=${energy}`);
};

test.describe("intake", () => {
  test("asks for number, unit and level by keyboard alone, then computes", async ({ page }) => {
    const run = Date.now();
    const text = ownFile((energy, frame) => `${run} ${energy} ${(frame * 0.37).toFixed(2)}`);
    await takeIn(page, text, {}, "intake");
    await expect(page.getByText("200 frames read: 200 can be accepted.", { exact: false })).toBeVisible();
    await page.locator("input[value='number:2']").focus();
    await page.keyboard.press("Space");
    await page.getByRole("button", { name: "Use Number 2 of the comment line" }).press("Enter");
    await page.locator("input[value='kcal/mol']").focus();
    await page.keyboard.press("Space");
    await page.getByRole("button", { name: "Confirm kcal/mol" }).press("Enter");
    await page.getByLabel("Name of the level of theory").fill("MMFF94");
    // The answer before may be on its way still: Enter sends once the button can be pressed.
    await expect(page.getByRole("button", { name: "Confirm kcal/mol" })).toHaveCount(0);
    await expect(page.getByRole("button", { name: "Name the level" })).toBeEnabled();
    await page.getByLabel("Name of the level of theory").press("Enter");
    await expect(page.getByText("200 frames read: all are accepted.")).toBeVisible();
    await page.getByRole("link", { name: /^Populations/ }).press("Enter");
    // Gauche, both hands in one, lies lowest in MMFF94: populations 0.4263, 0.4263 and 0.1474 of
    // fixtures/reference/ensembles/difluoroethane.expected.json.
    await expect(page.getByText(/c1 85\s% and c2 15\s%/)).toBeVisible();
  });

  test("holds a frame with its reason, says that results are of before, and takes it back", async ({
    page,
  }) => {
    await takeIn(page, named(), ANSWERED, "intake");
    await page.getByRole("button", { name: "Hold a frame…" }).click();
    const dialog = page.getByRole("dialog");
    await dialog.getByLabel("Frame", { exact: true }).fill("201");
    await dialog.getByLabel("Reason, for the logbook").fill("one imaginary mode");
    await dialog.getByRole("button", { name: "Hold the frame" }).click();
    await expect(dialog.getByText("Frames are numbered from 1 to 200, in file order.")).toBeVisible();
    await dialog.getByLabel("Frame", { exact: true }).fill("5");
    await dialog.getByRole("button", { name: "Hold the frame" }).click();
    await expect(page.getByText("199 are accepted", { exact: false })).toBeVisible();
    await page.getByRole("link", { name: /^Populations/ }).click();
    await expect(page.getByText("These results are of the frames as they were")).toBeVisible();
    await page.getByRole("button", { name: "Undo" }).click();
    await expect(page.getByText("Frame 5 takes part again.")).toBeVisible();
    await expect(page.getByText("These results are of the frames as they were")).toBeHidden();
    await page.getByRole("link", { name: /^Logbook/ }).click();
    await expect(page.getByText("Held frame 5")).toBeVisible();
    await expect(page.getByText("Undone: one imaginary mode")).toBeVisible();
  });
});

test.describe("distinct set", () => {
  test("follows the settings, keeps what it showed meanwhile, and goes back", async ({ page }) => {
    await takeIn(page, named(), ANSWERED, "distinct-set");
    // Anti and one hand of gauche: mirror images of an achiral molecule are one conformer.
    await expect(page.getByText("200 accepted frames repeat 2 shapes.")).toBeVisible();
    await page.getByRole("radio", { name: "Keep" }).check();
    await expect(page.getByText("200 accepted frames repeat 3 shapes.")).toBeVisible();
    await expect(page).toHaveURL(/sift=[a-z2-7]{16}/);
    await page.goBack();
    await expect(page.getByText("200 accepted frames repeat 2 shapes.")).toBeVisible();
    await expect(page.getByRole("radio", { name: "Auto: merge" })).toBeChecked();
  });

  test("names whom a frame repeats, and lays it over", async ({ page }) => {
    await takeIn(page, named(), ANSWERED, "distinct-set");
    await page.getByRole("button", { name: /repeats of c1$/ }).press("Enter");
    await page
      .getByRole("button", { name: /^Lay over frame/ })
      .first()
      .press("Enter");
    await expect(page.getByText(/^Frame \d+ laid over c\d+: (same hand|mirror image), RMSD/)).toBeVisible();
    await page.getByLabel("Which conformer is frame").fill("200");
    await page.keyboard.press("Enter");
    await expect(page.getByText(/^Frame 200 (repeats c[12]|is c[12] itself)/)).toBeVisible();
  });
});

test.describe("populations", () => {
  test("answer the temperature at once, and keep it in the address", async ({ page }) => {
    await openDemo(page, "N-Acetyl-L-alanine N-methylamide", "populations");
    const finding = page.getByText(/of the ensemble at 298\.15\sK/);
    await expect(finding).toBeVisible();
    await page.getByRole("slider", { name: "Temperature" }).press("PageUp");
    await expect(page.getByText(/of the ensemble at 308\.15\sK/)).toBeVisible();
    await expect(page).toHaveURL(/T=308\.15/);
    await page.getByRole("textbox", { name: "Temperature, typed" }).fill("cold");
    await page.keyboard.press("Enter");
    await expect(page.getByText("A temperature from 100 to 1000 K, for example 298.15.")).toBeVisible();
    await page.goBack();
    await expect(finding).toBeVisible();
    // What was refused belonged to the value before.
    await expect(page.getByRole("textbox", { name: "Temperature, typed" })).toHaveValue("298.15");
  });

  test("the table is walked, sorted and selected by keys", async ({ page }) => {
    await openDemo(page, "N-Acetyl-L-alanine N-methylamide", "populations");
    const rows = page.locator("tr[data-row]");
    await rows.first().focus();
    await page.keyboard.press("ArrowDown");
    await expect(rows.nth(1)).toBeFocused();
    await page.keyboard.press("Enter");
    await expect(rows.nth(1)).toHaveAttribute("aria-selected", "true");
    await page.keyboard.press("Shift+ArrowDown");
    await expect(rows.nth(2)).toHaveAttribute("aria-selected", "true");
    await expect(page).toHaveURL(/sel=\d+,\d+/);
    await page.getByRole("link", { name: /^Found/ }).press("Enter");
    await expect(page.getByRole("columnheader", { name: /^Found/ })).toHaveAttribute(
      "aria-sort",
      "descending",
    );
    await expect(page.locator("table[role=grid]")).toHaveAttribute("aria-rowcount", "8");
  });

  test("picked atoms are measured in every conformer", async ({ page }) => {
    await openDemo(page, "N-Acetyl-L-alanine N-methylamide", "populations?at=1,2,4,5");
    await expect(page.getByRole("heading", { name: /^Torsion / })).toBeVisible();
    await expect(page.locator("tr[data-row='0'] td").last()).toHaveText(/^\u2212?\d+$/);
    await expect(page.locator("tr[data-row='1'] td").nth(7)).toHaveText(/^\d\.\d{3}$/);
  });
});

test.describe("who may only read", () => {
  test("a reader moves the tolerances for the count alone, and no other setting", async ({ page }) => {
    await openDemo(page, "1,2-Difluoroethane", "distinct-set", "reader");
    await expect(page.getByRole("radio", { name: "All", exact: true })).toBeDisabled();
    await expect(page.getByText("It is counted in this browser, and nothing is stored")).toBeVisible();
    await page.getByRole("textbox", { name: "RMSD tolerance, typed" }).fill("0,9 Å");
    await page.keyboard.press("Enter");
    await expect(page.getByText("the set below stays as it is", { exact: false })).toBeVisible();
    await page.getByRole("button", { name: "Back to its settings" }).click();
    await expect(page.getByRole("textbox", { name: "RMSD tolerance, typed" })).toHaveValue("0.200");
    expect(page.url()).not.toContain("sift=");
    await expect(page.getByRole("button", { name: "Rename" })).toHaveCount(0);
  });

  test.describe("strangers", () => {
    test.use({ allowRefusals: true });
    test("find nothing at the address of somebody's ensemble", async ({ page }) => {
      const address = (await enter(page)).ensembles("1,2-Difluoroethane");
      await page.context().clearCookies();
      await enter(page, "outsider");
      await page.goto(address);
      await expect(page.getByRole("heading", { name: "Nothing here" })).toBeVisible();
    });
  });
});

for (const [width, scheme] of [
  [1440, "light"],
  [390, "dark"],
] as const) {
  test(`every section is accessible at ${width} px by ${scheme === "light" ? "day" : "night"}`, async ({
    page,
  }) => {
    // Five sections, each looked at once.
    test.slow();
    await page.setViewportSize({ width, height: 900 });
    await page.emulateMedia({ colorScheme: scheme });
    await openDemo(page, "N-Acetyl-L-alanine N-methylamide", "intake");
    for (const section of ["Intake", "Distinct set", "Populations", "Hand-over", "Logbook"]) {
      await page.getByRole("navigation", { name: "Sections" }).getByRole("link", { name: section }).click();
      await expect(page.getByRole("heading", { name: section, level: 2 })).toBeVisible();
      await expectAccessible(page);
      await expectNoSideways(page, section);
      if (width !== 1440) continue;
      await page.setViewportSize({ width: 1024, height: 900 });
      await expectNoSideways(page, `${section} at 1024 px`);
      await page.setViewportSize({ width, height: 900 });
    }
  });
}
