import { randomUUID } from "node:crypto";
import path from "node:path";
import type { Page } from "@playwright/test";
import {
  expect,
  expectAccessible,
  expectAccessibleEverywhere,
  expectNoSideways,
  hydrated,
  signIn,
  signUp,
  test,
} from "./base";

const FILES = path.join(import.meta.dirname, "../../fixtures/reference/ensembles");
const ENSEMBLE = path.join(FILES, "difluoroethane.xyz");
const OTHER = path.join(FILES, "aryl-ether.xyz");
const WATER = "3\nwater\nO 0 0 0\nH 0.96 0 0\nH -0.24 0.93 0\n";

/** A new person with a team of their own, so that tests do not meet in one table. */
async function ownTeam(page: Page): Promise<void> {
  await signUp(page, "Walker", `walker.${randomUUID()}@lab.example`);
  await hydrated(page);
}

const rows = (page: Page) => page.getByRole("table", { name: "Ensembles" }).getByRole("row");
const files = (page: Page) => page.getByLabel("Add files", { exact: true });

test.describe("a team without ensembles", () => {
  test("offers one's own files and the example", async ({ page }) => {
    await ownTeam(page);
    await expect(page.getByRole("heading", { name: "No ensembles yet" })).toBeVisible();
    await expect(page.getByText("choose them", { exact: true })).toBeVisible();
    await page.getByRole("link", { name: "Look at a finished one" }).click();
    await expect(page).toHaveURL(/\/ensembles\//);
  });

  test("makes a series by keyboard and gives the focus back", async ({ page }) => {
    await ownTeam(page);
    const open = page.getByRole("button", { name: "New series" });
    await open.press("Enter");
    await expect(page.getByRole("textbox", { name: "Name" })).toBeFocused();
    await page.keyboard.press("Escape");
    await expect(open).toBeFocused();
    await open.press("Enter");
    await page.keyboard.type("Tails");
    await page.keyboard.press("Enter");
    await expect(page).toHaveURL(/\?series=[a-z2-7]{16}$/);
    await expect(page.getByRole("heading", { name: "Tails", level: 1 })).toBeVisible();
  });
});

test.describe("taking files in", () => {
  test.use({ allowRefusals: true });

  test("leads from one file to its intake page", async ({ page }) => {
    await ownTeam(page);
    await files(page).setInputFiles(ENSEMBLE);
    await page.waitForURL(/\/ensembles\/[a-z2-7]{16}\/intake$/);
  });

  test("asks about several files, keeps the list, and says why one was refused", async ({ page }) => {
    await ownTeam(page);
    const bad = { name: "notes.xyz", mimeType: "text/plain", buffer: Buffer.from("hello\nworld\n") };
    const good = { name: "water.xyz", mimeType: "text/plain", buffer: Buffer.from(WATER) };
    await files(page).setInputFiles([bad, good]);
    await expect(page.getByRole("dialog", { name: "Take in 2 files" })).toBeVisible();
    await expectAccessible(page);
    await page.getByRole("button", { name: "Take in 2 ensembles" }).click();
    const list = page.getByRole("list", { name: "Files being taken in" });
    await expect(list.getByText("refused")).toBeVisible();
    await expect(list.getByText(/line 1.*atom count/)).toBeVisible();
    await expect(list.getByText("1 frame read")).toBeVisible();
    await expect(rows(page)).toHaveCount(2);
    await expectAccessible(page);
    await files(page).setInputFiles([good]);
    await page.waitForURL(/\/ensembles\/[a-z2-7]{16}\/intake$/);
  });

  test("takes what is let go or pasted anywhere on the page", async ({ page }) => {
    await ownTeam(page);
    const drop = (type: string) =>
      page.evaluate(
        ([kind, text]) => {
          const data = new DataTransfer();
          data.items.add(new File([text ?? ""], "dropped.xyz"));
          window.dispatchEvent(
            new DragEvent(kind ?? "", { dataTransfer: data, bubbles: true, cancelable: true }),
          );
        },
        [type, WATER],
      );
    await drop("dragenter");
    await expect(page.getByText("Let go to read 1 file")).toBeVisible();
    await drop("dragleave");
    await expect(page.getByText("Let go to read 1 file")).toBeHidden();
    await drop("dragenter");
    await drop("drop");
    await page.waitForURL(/\/intake$/);
    await page.goBack();
    await expect(rows(page)).toHaveCount(2);
    await page.evaluate((text) => {
      const data = new DataTransfer();
      data.setData("text/plain", text);
      window.dispatchEvent(
        new ClipboardEvent("paste", { clipboardData: data, bubbles: true, cancelable: true }),
      );
    }, `${WATER}${WATER}`);
    await page.waitForURL(/\/intake$/);
  });

  test("warns before a page is left whose uploads would stop", async ({ page }) => {
    await ownTeam(page);
    // The request waits until the test lets it go.
    let release = () => {};
    const held = new Promise<void>((resolve) => {
      release = resolve;
    });
    await page.route("**/files/upload", async (route) => {
      await held;
      await route.continue();
    });
    await files(page).setInputFiles(ENSEMBLE);
    await expect(page.getByRole("list", { name: "Files being taken in" })).toBeVisible();
    await page.getByRole("link", { name: "Tokens" }).click();
    const question = page.getByRole("dialog", { name: "Files are still on their way" });
    await expect(question).toBeVisible();
    await expectAccessible(page);
    await page.keyboard.press("Escape");
    await expect(question).toBeHidden();
    release();
    await page.waitForURL(/\/intake$/);
  });

  test("cancels, and sends again", async ({ page }) => {
    await ownTeam(page);
    let hold = true;
    await page.route("**/files/upload", async (route) => {
      if (hold) await new Promise(() => {});
      await route.continue();
    });
    await files(page).setInputFiles(ENSEMBLE);
    const list = page.getByRole("list", { name: "Files being taken in" });
    await list.getByRole("button", { name: "Cancel" }).press("Enter");
    await expect(list.getByText("cancelled", { exact: true })).toBeVisible();
    hold = false;
    await list.getByRole("button", { name: "Try again" }).press("Enter");
    await page.waitForURL(/\/intake$/);
  });

  test("is not offered to readers", async ({ page }) => {
    await signIn(page, "reader");
    await hydrated(page);
    await expect(rows(page).first()).toBeVisible();
    await expect(page.getByText("Add files")).toHaveCount(0);
    await expect(page.getByRole("button", { name: /^Acts on/ })).toHaveCount(0);
  });
});

test.describe("the table of ensembles", () => {
  test("finds, filters and sorts by address", async ({ page }) => {
    await signIn(page);
    await hydrated(page);
    const all = await rows(page).count();
    await page.getByRole("searchbox").pressSequentially("night");
    await expect(page).toHaveURL(/\?q=night$/);
    await expect(rows(page)).toHaveCount(2);
    await expect(page.getByRole("searchbox")).toBeFocused();
    await page.getByRole("link", { name: "show all" }).click();
    await expect(rows(page)).toHaveCount(all);
    await expect(page.getByRole("searchbox")).toHaveValue("");
    await page.getByLabel("Held").selectOption("some");
    await expect(page).toHaveURL(/\?held=some$/);
    await page.goto(`${new URL(page.url()).pathname}?sort=-frames`);
    await expect(page.locator("th[aria-sort=descending]")).toContainText("Frames");
    const counts = await rows(page).locator("td:nth-child(4)").allInnerTexts();
    const numbers = counts.map((text) => Number(text.replaceAll(",", "")));
    expect(numbers).toEqual([...numbers].sort((a, b) => b - a));
  });

  test("renames by keyboard, and brings back what was deleted", async ({ page }) => {
    await ownTeam(page);
    await files(page).setInputFiles(OTHER);
    await page.waitForURL(/\/intake$/);
    await page.goto("/teams");
    await hydrated(page);
    const acts = page.getByRole("button", { name: "Acts on aryl-ether" });
    await acts.press("Enter");
    await page.keyboard.press("Enter");
    await expect(page.getByRole("textbox", { name: "Name" })).toBeFocused();
    await page.keyboard.press("ControlOrMeta+A");
    await page.keyboard.type("Ether");
    await page.keyboard.press("Enter");
    const renamed = page.getByRole("button", { name: "Acts on Ether" });
    await expect(renamed).toBeFocused();
    await renamed.press("Enter");
    await page.getByRole("menuitem", { name: "Delete ensemble" }).press("Enter");
    await expect(page.getByText("Ether deleted.")).toBeVisible();
    await expect(page.getByRole("heading", { name: "No ensembles yet" })).toBeVisible();
    await page.getByRole("button", { name: "Undo" }).press("Enter");
    await expect(page.getByText("Ether is back.")).toBeVisible();
    await expect(page.getByRole("link", { name: "Ether", exact: true })).toBeVisible();
  });

  test("is accessible by day and by night, and as narrow as a phone", async ({ page }) => {
    // A long table by now, looked at four times.
    test.slow();
    await signIn(page, "owner");
    await hydrated(page);
    await expectAccessibleEverywhere(page, "the table");
    await page.setViewportSize({ width: 1024, height: 900 });
    await expectNoSideways(page, "the table at 1024 px");
    await page.getByRole("button", { name: /^Account of/ }).click();
    // What an open menu lies on counts as its neighbour for axe; its rows are 36 px high.
    await expectAccessibleEverywhere(page, "the account menu", ["target-size"]);
  });
});

test.describe("the account menu", () => {
  test("sets the theme for good, closes on Escape, and works without script", async ({
    browser,
    baseURL,
    page,
  }) => {
    await signIn(page);
    await hydrated(page);
    const menu = page.getByRole("button", { name: /^Account of/ });
    await menu.press("Enter");
    await page.getByRole("button", { name: "Night", exact: true }).click();
    await expect(page.locator("html")).toHaveAttribute("data-theme", "dark");
    await page.reload();
    await expect(page.locator("html")).toHaveAttribute("data-theme", "dark");
    await hydrated(page);
    await menu.press("Enter");
    await page.keyboard.press("Escape");
    await expect(menu).toBeFocused();

    const context = await browser.newContext({
      baseURL,
      javaScriptEnabled: false,
      storageState: await page.context().storageState(),
    });
    const plain = await context.newPage();
    await plain.goto("/teams");
    await plain.getByRole("button", { name: /^Account of/ }).click();
    await plain.getByRole("button", { name: "Day", exact: true }).click();
    await expect(plain.locator("html")).toHaveAttribute("data-theme", "light");
    await plain.getByRole("button", { name: /^Account of/ }).click();
    await plain.getByRole("button", { name: "Sign out" }).click();
    await expect(plain).toHaveURL(`${baseURL}/`);
    await context.close();
  });
});

test.describe("tokens", () => {
  test("are made, shown once with a call to try, and revoked", async ({ page, request }) => {
    await ownTeam(page);
    await page.getByRole("link", { name: "Tokens" }).click();
    await expect(page.getByRole("heading", { name: "No tokens yet" })).toBeVisible();
    await page.getByLabel("What it is for").fill("Night queue");
    await page.getByRole("button", { name: "Make token" }).click();
    const secret = await page.getByLabel("Token", { exact: true }).inputValue();
    expect(secret).toMatch(/^lowl_/);
    await expect(page.getByText("curl --fail-with-body", { exact: false }).first()).toBeVisible();
    await expectAccessible(page);
    const authorization = { Authorization: `Bearer ${secret}` };
    expect((await request.get("/api/v1/ensembles", { headers: authorization })).status()).toBe(200);
    await page.reload();
    await expect(page.getByText(secret)).toHaveCount(0);
    await hydrated(page);
    await page.getByRole("button", { name: "Revoke Night queue" }).click();
    await page.getByRole("button", { name: "Revoke token" }).click();
    await expect(page.getByRole("heading", { name: "No tokens yet" })).toBeVisible();
    expect((await request.get("/api/v1/ensembles", { headers: authorization })).status()).toBe(401);
  });
});
