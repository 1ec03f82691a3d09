import { randomUUID } from "node:crypto";
import { readFileSync } from "node:fs";
import path from "node:path";
import type { Page } from "@playwright/test";
import { expect, expectAccessible, hydrated, signIn, test } from "./base";

const FILE = path.join(import.meta.dirname, "../../fixtures/reference/ensembles/difluoroethane.xyz");

/** The file with comments of its own, so that no two tests share an ensemble. */
function ownFile(): Buffer {
  const lines = readFileSync(FILE, "utf8").split("\n");
  const atoms = Number(lines[0]);
  for (let at = 1; at < lines.length; at += atoms + 2)
    lines[at] = `run=${randomUUID()} energy=${lines[at]?.trim()}`;
  return Buffer.from(lines.join("\n"));
}

/** A new ensemble of the analyst's team, on its Hand-over page. */
async function handOver(page: Page): Promise<void> {
  await signIn(page);
  const { origin, pathname } = new URL(page.url());
  const answer = await page.request.post("/files/upload", {
    headers: { origin },
    multipart: {
      team: pathname.split("/")[2] ?? "",
      name: "1,2-Difluoroethane to hand over",
      level: "MMFF94",
      energyUnit: "kcal/mol",
      energyFrom: "key:energy",
      file: { name: "difluoroethane.xyz", mimeType: "chemical/x-xyz", buffer: ownFile() },
    },
  });
  expect(answer.status()).toBe(201);
  const { id } = (await answer.json()) as { id: string };
  await page.goto(`/ensembles/${id}/hand-over`);
  await hydrated(page);
  await expect(page.getByRole("button", { name: "Freeze edition 1" })).toBeVisible({ timeout: 30_000 });
}

test.describe("handing over", () => {
  test.use({ allowRefusals: true });

  test("freeze, link, a private window on a phone, print, end, and the window says so", async ({
    page,
    browser,
  }) => {
    await handOver(page);
    await page.getByRole("button", { name: "Freeze edition 1" }).click();
    const dialog = page.getByRole("dialog", { name: "Freeze edition 1" });
    await expectAccessible(page);
    await dialog.getByLabel("Title").fill("First look");
    await dialog.getByRole("button", { name: "Freeze edition 1" }).click();
    await expect(page.getByRole("link", { name: "Edition 1" })).toBeVisible();

    await page.getByRole("button", { name: "Recompute and verify" }).click();
    await expect(page.getByText("the same bytes", { exact: true })).toBeVisible();

    await page.getByRole("button", { name: "New link" }).click();
    await page.getByLabel("For whom").fill("Partner laboratory");
    await page.getByLabel("Whom to ask once it has ended").fill("Ask Robin");
    await expect(page.getByLabel("Ends in")).toHaveValue("14");
    await page.getByRole("button", { name: "Make link" }).click();
    const address = await page.getByLabel("Address").inputValue();
    expect(address).toMatch(/\/e\/[a-z2-7]{32}$/);
    await expectAccessible(page);
    await page.getByRole("button", { name: "Done" }).click();
    expect(await page.content()).not.toContain(address);

    const guest = await browser.newContext({ viewport: { width: 390, height: 844 } });
    const phone = await guest.newPage();
    await phone.goto(address);
    await expect(phone.getByRole("heading", { level: 1, name: /difluoroethane/i })).toBeVisible();
    await expect(phone.getByText(/this link ends/)).toBeVisible();
    await expect(phone.getByRole("heading", { name: /shapes?$/ }).first()).toBeVisible();
    await expect(phone.getByRole("heading", { name: "How sure" })).toBeVisible();
    await expect(phone.getByRole("link", { name: /Populations and properties/ })).toBeVisible();
    expect(await phone.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(390);
    await expectAccessible(phone);
    const download = phone.waitForEvent("download");
    await phone.getByRole("link", { name: /Bundle with checksums/ }).click();
    expect((await download).suggestedFilename()).toContain("bundle.zip");

    // The report on paper: the checksum stands there, the controls do not.
    await phone.emulateMedia({ media: "print" });
    await expect(phone.getByText(/SHA-256 [0-9a-f]{64}$/).last()).toBeVisible();
    await expect(phone.getByRole("link", { name: "Download", exact: true })).toBeHidden();
    for (const format of ["A4", "Letter"]) {
      const pdf = await phone.pdf({ format });
      expect(pdf.subarray(0, 5).toString()).toBe("%PDF-");
    }
    await phone.emulateMedia({ media: null });

    await page.reload();
    await expect(page.getByRole("table", { name: "Links" }).getByText("1 time")).toBeVisible();
    await page.getByRole("button", { name: "End now the link for Partner laboratory" }).click();
    await page.getByRole("dialog").getByRole("button", { name: "End link" }).click();
    await expect(page.getByText("The link for Partner laboratory has ended.")).toBeVisible();
    await expect(page.getByRole("table", { name: "Links" }).getByText("ended by hand")).toBeVisible();
    const ended = await phone.reload();
    expect(ended?.status()).toBe(404);
    await expect(phone.getByRole("heading", { name: "This link has ended" })).toBeVisible();
    await expect(phone.getByText("Ask Robin")).toBeVisible();
    expect((await phone.request.get(`${address}/files/results.csv`)).status()).toBe(404);
    await guest.close();
  });

  test("an edition reads without script", async ({ page, browser }) => {
    await handOver(page);
    await page.getByRole("button", { name: "Freeze edition 1" }).click();
    await page.getByRole("dialog").getByRole("button", { name: "Freeze edition 1" }).click();
    await page.getByRole("button", { name: "New link" }).click();
    await page.getByLabel("For whom").fill("Somebody");
    await page.getByRole("button", { name: "Make link" }).click();
    const address = await page.getByLabel("Address").inputValue();
    const plain = await browser.newContext({ javaScriptEnabled: false });
    const reader = await plain.newPage();
    await reader.goto(address);
    await expect(reader.getByRole("img", { name: /from end to end/ }).first()).toBeVisible();
    await expect(reader.getByRole("img", { name: "Energy ladder" })).toBeVisible();
    await expect(reader.getByRole("table", { name: "Conformers", exact: true })).toBeVisible();
    await plain.close();
  });

  test("the logbook tells of it, and takes a remark", async ({ page }) => {
    await handOver(page);
    await page.getByRole("button", { name: "Freeze edition 1" }).click();
    await page.getByRole("dialog").getByRole("button", { name: "Freeze edition 1" }).click();
    await expect(page.getByRole("link", { name: "Edition 1" })).toBeVisible();
    await page
      .getByRole("link", { name: /Logbook/ })
      .first()
      .click();
    await expect(page.getByText("Froze edition 1")).toBeVisible();
    await page.getByRole("textbox", { name: "Remark" }).fill("Looks right to me");
    await page.getByRole("button", { name: "Add remark" }).click();
    await expect(page.getByText("“Looks right to me”")).toBeVisible();
    await page.getByLabel("Kind").selectOption("edition");
    await expect(page.getByText("“Looks right to me”")).toBeHidden();
    await expect(page).toHaveURL(/kind=edition/);
    await expectAccessible(page);
  });
});
