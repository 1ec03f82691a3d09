import { readFileSync } from "node:fs";
import type { Locator, Page } from "@playwright/test";
import { expect, test } from "./base";

/** The 3D view, on the example that anybody may open. */
test.beforeEach(async ({ page }) => {
  await page.goto("/");
});

const surface = (page: Page) => page.getByRole("application");
const field = (page: Page) => page.getByLabel("Atoms to measure");
const rings = (page: Page) => page.locator("figure svg[data-marks] circle");

/** Waits for the canvas and for coordinates: until then a still picture stands there. */
async function opened(page: Page): Promise<void> {
  await expect(page.locator("figure canvas")).toBeVisible();
  await expect(surface(page)).toHaveAccessibleName(/in atom colours/);
}

async function place(ring: Locator): Promise<{ x: number; y: number }> {
  const box = await ring.boundingBox();
  if (!box) throw new Error("The ring is not on the page.");
  return { x: box.x + box.width / 2, y: box.y + box.height / 2 };
}

async function pick(page: Page, names: string): Promise<void> {
  await field(page).fill(names);
  await field(page).press("Enter");
}

test("atoms picked by name are those that a click takes out and puts back", async ({ page }) => {
  await opened(page);
  await pick(page, "1 2 4 5");
  await expect(rings(page)).toHaveCount(4);
  await expect(page.getByText(/^Torsion .+°\.$/)).toBeVisible();
  const { x, y } = await place(rings(page).nth(3));
  await page.mouse.click(x, y);
  await expect(rings(page)).toHaveCount(3);
  await expect(page.getByText(/^Angle .+°\.$/)).toBeVisible();
  await page.mouse.click(x, y);
  await expect(rings(page)).toHaveCount(4);
});

test("a name that no atom has is answered with what would be right", async ({ page }) => {
  await opened(page);
  await pick(page, "C1 N99");
  await expect(page.getByRole("alert").filter({ hasText: "No atom is called “N99”" })).toBeVisible();
});

test("arrow keys turn, plus zooms, 0 resets", async ({ page }) => {
  await opened(page);
  await pick(page, "1 2 4 5");
  const start = await place(rings(page).first());
  await surface(page).focus();
  await page.keyboard.press("ArrowRight");
  await page.keyboard.press("ArrowUp");
  await page.keyboard.press("+");
  expect(await place(rings(page).first())).not.toEqual(start);
  await page.keyboard.press("0");
  expect(await place(rings(page).first())).toEqual(start);
});

test("the wheel scrolls the page until the view has the focus", async ({ page }) => {
  await opened(page);
  await pick(page, "1 5");
  const start = await rings(page).first().getAttribute("cx");
  await field(page).blur();
  await surface(page).hover();
  await page.mouse.wheel(0, 120);
  await expect.poll(() => page.evaluate(() => scrollY)).toBeGreaterThan(0);
  expect(await rings(page).first().getAttribute("cx")).toBe(start);
  await surface(page).focus();
  await surface(page).hover();
  const scrolled = await page.evaluate(() => scrollY);
  await page.mouse.wheel(0, -120);
  await expect.poll(() => rings(page).first().getAttribute("cx")).not.toBe(start);
  expect(await page.evaluate(() => scrollY)).toBe(scrolled);
});

test("the canvas follows the theme at once", async ({ page }) => {
  await opened(page);
  const ground = () =>
    page.locator("figure canvas").evaluate((canvas: HTMLCanvasElement) => {
      const paint = document.createElement("canvas").getContext("2d");
      paint?.drawImage(canvas, 0, 0, 4, 4, 0, 0, 1, 1);
      return [...(paint?.getImageData(0, 0, 1, 1).data ?? [])].slice(0, 3);
    });
  await page.emulateMedia({ colorScheme: "light" });
  await expect.poll(ground).toEqual([0xfa, 0xfc, 0xfa]);
  await page.emulateMedia({ colorScheme: "dark" });
  await expect.poll(ground).toEqual([0x10, 0x18, 0x1f]);
});

test("the picture is saved at twice its size, with its title above it", async ({ page }) => {
  await opened(page);
  const box = await surface(page).boundingBox();
  const [download] = await Promise.all([
    page.waitForEvent("download"),
    page.getByRole("button", { name: "Save picture" }).click(),
  ]);
  expect(download.suggestedFilename()).toMatch(/^[a-z0-9-]+\.png$/);
  const bytes = readFileSync(await download.path());
  expect(bytes.subarray(1, 4).toString()).toBe("PNG");
  expect(bytes.readUInt32BE(16)).toBe(2 * Math.round(box?.width ?? 0));
  expect(bytes.readUInt32BE(20)).toBe(2 * Math.round((box?.height ?? 0) + 44));
});

test("leaving the page takes the canvas along, and coming back opens one", async ({ page }) => {
  await opened(page);
  await page.getByRole("link", { name: "Methods" }).first().click();
  await expect(page.locator("canvas")).toHaveCount(0);
  await page.goBack();
  await opened(page);
  await expect(page.locator("canvas")).toHaveCount(1);
});

test.describe("without WebGL", () => {
  test.beforeEach(async ({ page }) => {
    await page.addInitScript(() => {
      for (const kind of [HTMLCanvasElement, OffscreenCanvas]) {
        const plain = kind.prototype.getContext as (...args: unknown[]) => unknown;
        kind.prototype.getContext = function (this: unknown, name: string, ...rest: unknown[]) {
          return name.startsWith("webgl") ? null : plain.call(this, name, ...rest);
        } as never;
      }
    });
    await page.reload();
  });

  test("a picture stands in that can be measured in and turned", async ({ page }) => {
    await expect(page.getByText("This browser draws no 3D")).toBeVisible();
    await expect(page.locator("figure canvas")).toHaveCount(0);
    await pick(page, "1 2 4 5");
    const drawn = page.locator("figure svg[role=img] g[data-marks] circle");
    await expect(drawn).toHaveCount(4);
    const start = await drawn.first().getAttribute("cx");
    await surface(page).focus();
    await page.keyboard.press("ArrowRight");
    await expect.poll(() => drawn.first().getAttribute("cx")).not.toBe(start);
  });
});
