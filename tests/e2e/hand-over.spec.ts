import { execFile } from "node:child_process";
import { randomUUID } from "node:crypto";
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { promisify } from "node:util";
import type { Browser, Page } from "@playwright/test";
import {
  enter,
  expect,
  expectAccessible,
  expectNoSideways,
  hydrated,
  letterLink,
  signUp,
  test,
} from "./base";

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
  const { team, origin } = await enter(page);
  const answer = await page.request.post("/files/upload", {
    headers: { origin },
    multipart: {
      team,
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

const run = promisify(execFile);

/** curl as a batch job calls it, with the token in a file; status and what was answered. */
async function curl(folder: string, words: string[]): Promise<{ status: number; body: string }> {
  const all = ["--silent", "--write-out", "\n%{http_code}", "-H", "@token.txt", ...words];
  const { stdout } = await run("curl", all, { cwd: folder });
  const at = stdout.lastIndexOf("\n");
  return { status: Number(stdout.slice(at + 1)), body: stdout.slice(0, at) };
}

/** An owner in one browser and an invited analyst in another; the owner's token lies in a file of `folder`. */
async function twoPeople(page: Page, browser: Browser, baseURL: string | undefined) {
  const mark = randomUUID().slice(0, 8);
  const email = `n${mark}@lab.example`;
  await signUp(page, "Ada Quist", `o${mark}@lab.example`);
  const team = page.url();
  await page.goto(`${team}/people`);
  await hydrated(page);
  await page.getByLabel("Address").fill(email);
  await page.getByRole("radio", { name: /^analyst/i }).check();
  await page.getByRole("button", { name: "Send invitation" }).click();
  await expect(page.getByText(`An invitation goes to ${email}.`)).toBeVisible();
  const context = await browser.newContext({ baseURL });
  const analyst = await context.newPage();
  const invitation = await letterLink(analyst, email, "invitation");
  await analyst.goto(invitation);
  await analyst.getByLabel("Name, as the logbook shows it").fill("Bo Ferrant");
  await analyst.getByLabel("Password").fill("nine slow herons wade");
  await analyst.getByRole("button", { name: /^Join/ }).click();
  await analyst.waitForURL(/\/teams\/[a-z2-7]{16}$/);

  await page.goto(`${team}/tokens`);
  await hydrated(page);
  await page.getByLabel("What it is for").fill("Batch job");
  await page.getByText("All that you may").click();
  await page.getByRole("button", { name: "Make token" }).click();
  const folder = mkdtempSync(path.join(os.tmpdir(), "lowlying-walk-"));
  const token = await page.getByLabel("Token", { exact: true }).inputValue();
  writeFileSync(path.join(folder, "token.txt"), `Authorization: Bearer ${token}\n`, { mode: 0o600 });
  writeFileSync(path.join(folder, "night.xyz"), ownFile());
  return { team, analyst, context, invitation, folder };
}

test.describe("handing over", () => {
  test.use({ allowRefusals: true });

  test("an owner, an analyst, a batch job and a guest: from the invitation to the ended link", async ({
    page: ownerPage,
    browser,
    baseURL,
  }) => {
    test.slow();
    const { team, analyst: page, context, invitation, folder } = await twoPeople(ownerPage, browser, baseURL);
    const api = `${baseURL}/api/v1/ensembles`;
    const sent = ["-F", "level=MMFF94", "-F", "energyUnit=kcal/mol", "-F", "energyFrom=key:energy"];
    const pushed = await curl(folder, [
      ...sent,
      "-F",
      "file=@night.xyz",
      "-F",
      "name=1,2-Difluoroethane",
      api,
    ]);
    expect(pushed.status).toBe(201);
    const { id } = JSON.parse(pushed.body) as { id: string };
    const read = await curl(folder, [`${api}/${id}`]);
    expect([read.status, (JSON.parse(read.body) as { formula: string }).formula]).toEqual([200, "C2H4F2"]);

    await page.goto(`/ensembles/${id}/hand-over`);
    await hydrated(page);
    await expect(page.getByRole("button", { name: "Freeze edition 1" })).toBeVisible({ timeout: 30_000 });
    await page.keyboard.press("?");
    await expect(page.getByRole("dialog", { name: "Keys on this page" })).toBeVisible();
    await page.keyboard.press("Escape");
    await expect(page.getByRole("dialog")).toHaveCount(0);
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
    await expectNoSideways(phone, "the guest's page");
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

    // What is used up, revoked or guessed leads nowhere: the right status, and words that say what to do.
    const guessed = await phone.goto(address.replace(/.{8}$/, "aaaaaaaa"));
    expect(guessed?.status()).toBe(404);
    await expect(phone.getByRole("heading", { name: "Nothing here" })).toBeVisible();
    await expect(phone.getByText("Ask Robin")).toHaveCount(0);
    expect((await phone.goto(invitation))?.status()).toBe(404);
    await expect(phone.getByRole("heading", { name: "No open invitation here" })).toBeVisible();
    await ownerPage.goto(`${team}/tokens`);
    await hydrated(ownerPage);
    await ownerPage.getByRole("button", { name: "Revoke Batch job" }).click();
    await ownerPage.getByRole("button", { name: "Revoke token" }).click();
    // Behind an open dialog nothing has a role: the list tells of it once the dialog is gone.
    await expect(ownerPage.locator("[role=dialog], [role=alertdialog]")).toHaveCount(0);
    await expect(ownerPage.getByRole("button", { name: "Revoke Batch job" })).toHaveCount(0);
    const refused = await curl(folder, [api]);
    expect(refused.status).toBe(401);
    expect(refused.body).toContain('"detail"');
    writeFileSync(path.join(folder, "token.txt"), "Authorization: Bearer lowl_guessed\n");
    expect((await curl(folder, [api])).status).toBe(401);
    rmSync(folder, { recursive: true, force: true });
    await guest.close();
    await context.close();
  });

  test("an edition reads without script", async ({ page, browser }) => {
    await handOver(page);
    await page.getByRole("button", { name: "Freeze edition 1" }).click();
    await page.getByRole("dialog").getByRole("button", { name: "Freeze edition 1" }).click();
    await page.getByRole("button", { name: "New link" }).click();
    await page.getByLabel("For whom").fill("Somebody");
    await page.getByRole("button", { name: "Make link" }).click();
    const address = await page.getByLabel("Address").inputValue();
    const phone = { width: 390, height: 844 };
    const plain = await browser.newContext({ javaScriptEnabled: false, viewport: phone });
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
