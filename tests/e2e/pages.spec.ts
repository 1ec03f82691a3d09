import { randomUUID } from "node:crypto";
import { readFileSync } from "node:fs";
import type { Browser, Page } from "@playwright/test";
import {
  expect,
  expectAccessible,
  expectNoSideways,
  hydrated,
  openDemo,
  signUp,
  signUpByForm,
  test,
} from "./base";

/** What holds for every page: history, paper, no script, narrow screens, focus, and held frames of something else. */

const FILES = new URL("../../fixtures/reference/ensembles/", import.meta.url);
const difluoroethane = readFileSync(new URL("difluoroethane.xyz", FILES), "utf8");
const LARGE = "2-(Dimethylamino)ethyl 4-butoxybenzoate";
const SMALL = "N-Acetyl-L-alanine N-methylamide";

/** A file that no other test sends. */
function ownFile(text: string, comment: (old: string, frame: number) => string) {
  const lines = text.split("\n");
  let frame = 0;
  for (let at = 1; at < lines.length; at += Number(lines[at - 1]) + 2) {
    frame += 1;
    lines[at] = comment(lines[at] ?? "", frame);
    if (!(Number(lines[at + Number(lines[at - 1]) + 1]) > 0)) break;
  }
  return { name: "search.xyz", mimeType: "chemical/x-xyz", buffer: Buffer.from(lines.join("\n")) };
}

async function ownTeam(page: Page): Promise<void> {
  await signUp(page, "Walker", `walker.${randomUUID()}@lab.example`);
  await hydrated(page);
}

const addFiles = (page: Page) => page.getByLabel("Add files", { exact: true });
const rows = (page: Page) => page.locator("tr[data-row]");
const focused = (page: Page) => page.evaluate(() => document.activeElement?.id);

test.describe("the browser's Back", () => {
  test("undoes temperature, picks, arrangement and selection, one by one", async ({ page }) => {
    await openDemo(page, SMALL, "populations");
    const search = () => new URL(page.url()).searchParams;
    await rows(page).nth(1).click();
    await expect.poll(() => search().get("sel")).toMatch(/^\d+$/);
    const selected = search().get("sel");
    await page.getByRole("radio", { name: "Side by side", exact: true }).click();
    await expect.poll(() => search().get("m")).toBe("side");
    await page.getByLabel("Atoms to measure").fill("1 2 4 5");
    await page.keyboard.press("Enter");
    await expect.poll(() => search().get("at")).toBe("1,2,4,5");
    // Several steps by key are one walk, and one step of the history.
    const slider = page.getByRole("slider", { name: "Temperature" });
    await slider.focus();
    for (let k = 0; k < 5; k++) await page.keyboard.press("ArrowRight");
    await expect.poll(() => search().get("T")).toBe("303.15");
    await page.goBack();
    await expect(slider).toHaveValue("298");
    expect([search().get("T"), search().get("at")]).toEqual([null, "1,2,4,5"]);
    await page.goBack();
    await expect(page.getByLabel("Atoms to measure")).toHaveValue("");
    await page.goBack();
    await expect(page.getByRole("radio", { name: "Overlay" })).toBeChecked();
    expect(search().get("sel")).toBe(selected);
    await page.goBack();
    await expect(rows(page).nth(0)).toHaveAttribute("aria-selected", "true");
    expect(search().get("sel")).toBe(null);
  });
});

test.describe("paper", () => {
  test("has no controls, and carries every row and what the settings were", async ({ page }) => {
    // Five sections, each with its structures.
    test.slow();
    await page.emulateMedia({ colorScheme: "dark" });
    const address = await openDemo(page, LARGE, "intake");
    for (const section of ["Intake", "Distinct set", "Populations", "Hand-over", "Logbook"]) {
      await test.step(section, async () => {
        await page.goto(`${address}/${section.toLowerCase().replace(" ", "-")}`);
        await hydrated(page);
        await expect(page.getByRole("heading", { name: section, level: 2 })).toBeVisible();
        const table = section === "Populations";
        if (table) await expect(rows(page)).toHaveCount(12);
        await page.emulateMedia({ media: "print", colorScheme: "dark" });
        await expectPaper(page);
        if (table) {
          await expect(rows(page)).toHaveCount(344);
          await expect(
            page.getByText(
              /^Level MMFF94, 298\.15\sK, energy window 3\.00\skcal\/mol, weighted by copies\.$/,
            ),
          ).toBeVisible();
        }
        await page.emulateMedia({ media: "screen", colorScheme: "dark" });
        if (table) await expect(rows(page)).toHaveCount(12);
      });
    }
  });
});

/** Nothing that only a screen can use, on white. */
async function expectPaper(page: Page): Promise<void> {
  const controls = page.locator(
    "main :is(input, select, textarea, [role=slider], [role=application], label):visible",
  );
  await expect(controls).toHaveCount(0);
  // Names of files that the paper lists are words there.
  for (const link of await page.locator("main a[download]:visible").all()) {
    await expect(link).toHaveCSS("text-decoration-line", "none");
  }
  // What is left of buttons are figures and names of conformers, as text.
  for (const text of await page.locator("main button:visible").allTextContents()) {
    expect(text).toMatch(/^[\u2212\d.,]+$|^c\d+/);
  }
  await expect(page.getByRole("banner")).toBeHidden();
  const ground = await page.evaluate(() => getComputedStyle(document.documentElement).backgroundColor);
  expect(ground).toBe("rgb(255, 255, 255)");
}

test.describe("without script", () => {
  async function plain(browser: Browser, baseURL: string | undefined): Promise<Page> {
    return (await browser.newContext({ baseURL, javaScriptEnabled: false })).newPage();
  }

  test("figures are tables, nothing is on its way for ever, no button is dead", async ({
    browser,
    baseURL,
  }) => {
    const page = await plain(browser, baseURL);
    await page.goto("/");
    const example = await page.getByRole("link", { name: "Open this example" }).getAttribute("href");
    for (const path of [
      "/",
      `${example}/populations`,
      `${example}/distinct-set`,
      `${example}/intake`,
      `${example}/hand-over`,
      `${example}/logbook`,
    ]) {
      await page.goto(path);
      // Whatever can be filled in can be sent.
      await expect(
        page.locator("main :is(input, select):visible:not(form:has([type=submit]) *)"),
        path,
      ).toHaveCount(0);
      await expect(
        page.getByText(/on the way|Comparing|Fetching/).filter({ visible: true }),
        path,
      ).toHaveCount(0);
      for (const text of await page.locator("main button:visible:not([type=submit])").allTextContents()) {
        expect(text, path).toMatch(/^[\u2212\d.,]+$/);
      }
    }
    await page.goto(`${example}/populations`);
    for (const figure of ["Energy ladder", "Cumulative population"]) {
      await expect(page.getByRole("table", { name: figure }).getByRole("row")).toHaveCount(8);
    }
    await expect(page.locator("figure svg:visible")).toHaveCount(0);
    await page.getByRole("link", { name: /^Found/ }).click();
    await expect(page.getByRole("columnheader", { name: /^Found/ })).toHaveAttribute(
      "aria-sort",
      "descending",
    );
    await page.context().close();
  });
});

test.describe("narrow and enlarged", () => {
  test("no page scrolls sideways at 320 px", async ({ page }) => {
    await page.setViewportSize({ width: 320, height: 700 });
    const address = await openDemo(page, LARGE, "distinct-set");
    const team = await page.evaluate(() =>
      document.querySelector("a[href^='/teams/']")?.getAttribute("href"),
    );
    const sections = ["intake", "distinct-set", "populations", "hand-over", "logbook"];
    for (const path of [
      "/",
      team ?? "/teams",
      "/methods",
      "/formats",
      "/words",
      ...sections.map((one) => `${address}/${one}`),
    ]) {
      await page.goto(path);
      await hydrated(page);
      await expect(page.getByRole("heading").first()).toBeVisible();
      await expectNoSideways(page, path);
    }
  });
});

test.describe("keys and readers", () => {
  test("rows follow keys at once, however quick they come", async ({ page }) => {
    await openDemo(page, LARGE, "populations");
    await page.getByRole("button", { name: "Show all 344" }).press("Enter");
    await rows(page).first().focus();
    // All in one task of the browser: no frame is drawn between them.
    await page.evaluate(() => {
      for (let k = 0; k < 60; k++) {
        const key = new KeyboardEvent("keydown", { key: "ArrowDown", bubbles: true, cancelable: true });
        document.activeElement?.dispatchEvent(key);
      }
    });
    await expect(page.locator("tr[data-row='60']")).toBeFocused();
    for (const [key, row] of [
      ["End", 343],
      ["PageUp", 333],
      ["Home", 0],
    ] as const) {
      await page.keyboard.press(key);
      await expect(page.locator(`tr[data-row='${row}']`)).toBeFocused();
    }
  });

  test("a key figure says what it is, its origin covers nothing, and a point in focus wears a ring", async ({
    page,
  }) => {
    await openDemo(page, SMALL, "populations");
    const button = page.getByRole("button", { name: /^Entropy|^Conformational entropy/ });
    await expect(button).toHaveAccessibleName(/^Conformational entropy: 1\.96 cal\/\(mol K\)/);
    await button.focus();
    await page.keyboard.press("Shift+Tab");
    await page.keyboard.press("Tab");
    const popover = page.getByRole("dialog", { name: /Conformational entropy/ });
    await expect(popover).toBeVisible();
    const box = await popover.boundingBox();
    for (const place of [
      page.locator("[data-figure]", { has: button }),
      page.getByRole("navigation", { name: "Sections" }),
    ]) {
      const other = await place.boundingBox();
      const apart =
        (box?.y ?? 0) >= (other?.y ?? 0) + (other?.height ?? 0) ||
        (box?.y ?? 0) + (box?.height ?? 0) <= (other?.y ?? 0);
      expect(apart).toBe(true);
    }

    // A point of a figure that has the focus wears a ring of its own.
    const figure = page.getByRole("figure", { name: /^Energy against RMSD/ });
    const point = figure.getByRole("button", { name: /^c\d+, frame/ });
    await point.focus();
    await page.keyboard.press("ArrowRight");
    await expect(point.locator("circle[r='7.5']").last()).toHaveCSS("opacity", "1");
    for (const tool of ["Table", "CSV", "SVG"]) {
      const size = await figure.getByRole("button", { name: new RegExp(`^${tool}`) }).boundingBox();
      expect(Math.min(size?.width ?? 0, size?.height ?? 0)).toBeGreaterThanOrEqual(24);
    }
  });

  test("the focus goes to the new page after sign-up and after an upload", async ({ page }) => {
    await signUpByForm(page, "Nadia Orth", `${randomUUID()}@lab.example`);
    await expect.poll(() => focused(page)).toBe("content");
    await addFiles(page).setInputFiles(
      ownFile(difluoroethane, (old, k) => `${randomUUID()} ${k} energy=${old}`),
    );
    await page.waitForURL(/\/intake$/);
    await expect.poll(() => focused(page)).toBe("content");
  });
});

test.describe("taking in", () => {
  test("counts questions on, shows each spread, and says in the table who waits", async ({ page }) => {
    await ownTeam(page);
    const run = Date.now();
    await addFiles(page).setInputFiles(
      ownFile(difluoroethane, (old, k) => `${run} ${old} ${(k * 0.37).toFixed(2)}`),
    );
    await page.waitForURL(/\/intake$/);
    const card = (name: string) => page.getByRole("region", { name });
    await expect(card("Which number is the energy?")).toContainText("Question 1 of");
    // 0.37 times 1 to 200: the spread as it is written, whatever the unit.
    await expect(card("Which number is the energy?")).toContainText("73.63");
    await page.goto("/teams");
    await expect(page.getByRole("table", { name: "Ensembles" })).toContainText("200 wait");
    await page.goBack();
    await page.locator("input[value='number:2']").check();
    await page.getByRole("button", { name: "Use Number 2 of the comment line" }).click();
    await expect(card("In which unit?")).toContainText("Question 2 of");
    await expect(card("In which unit?")).toContainText("Spread it would mean");
    await expectAccessible(page);
  });

  test("says that the same file is already here, and as what", async ({ page }) => {
    await ownTeam(page);
    const file = ownFile(difluoroethane, (old, k) => `${randomUUID()} ${k} energy=${old}`);
    await addFiles(page).setInputFiles(file);
    await page.waitForURL(/\/intake$/);
    const first = page.url();
    await page.goto("/teams");
    await hydrated(page);
    await addFiles(page).setInputFiles(file);
    await page.waitForURL(first);
    // The list of uploads went with the page before; the line at the foot came along.
    await expect(page.getByText("already here", { exact: true })).toBeVisible();
    await expect(
      page.getByText("Already here as search: the same bytes make no second ensemble."),
    ).toHaveCount(1);
  });

  test("makes an ensemble of held frames of another molecule, and leads to it from then on", async ({
    page,
  }) => {
    await ownTeam(page);
    const run = randomUUID();
    const water = [1, 2]
      .map((k) => `3\n${run} w${k} energy=-${k}.5 kcal/mol\nO 0 0 0\nH 0.96 0 0.0${k}\nH -0.24 0.93 0\n`)
      .join("");
    const chain = ownFile(difluoroethane, (old, k) => `${run} ${k} energy=${old} kcal/mol`);
    const buffer = Buffer.concat([
      chain.buffer,
      Buffer.from(`${chain.buffer.at(-1) === 10 ? "" : "\n"}${water}`),
    ]);
    await addFiles(page).setInputFiles({ ...chain, buffer });
    await page.waitForURL(/\/intake$/);
    const parent = page.url();
    const make = page.getByRole("button", { name: "Make an ensemble of these 2 frames" });
    await make.click();
    await expect(page.getByText(/of 2 frames\. They stay held where they came from\./)).toBeVisible();
    await expect(page.getByRole("heading", { level: 1 })).toContainText("search, ");
    const child = page.url();
    expect(child).not.toBe(parent);
    await expect(page.getByText("2 frames", { exact: true })).toBeVisible();
    await page.goto(parent);
    await hydrated(page);
    // What was made stands where it was offered; asking again makes none.
    await expect(make).toHaveCount(0);
    await page.getByRole("link", { name: "search, H2O" }).click();
    await page.waitForURL(new URL(child).pathname);
    await page.getByRole("link", { name: /^Logbook/ }).click();
    await expect(page.getByText("Made of 2 held frames of search")).toBeVisible();
  });
});
