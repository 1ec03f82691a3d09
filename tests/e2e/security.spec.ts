import { randomUUID } from "node:crypto";
import { readFileSync } from "node:fs";
import { expect, hydrated, signUp, test } from "./base";

// What a browser makes of hostile files, of a sign-out, and of figures as files. The page of `base.ts` fails on every
// script that breaks, every breach of the policy, and every request to another host.

const SCRIPT = "<script>alert(666)</script>";
const IMAGE = `"><img src=x onerror=alert(666)>`;

const ATOMS = [
  "C -1.9480 -0.1280 0.0000",
  "C -0.5680 0.5210 0.0000",
  "C 0.5680 -0.5210 0.0000",
  "C 1.9480 0.1280 0.0000",
  "H -2.7400 0.6290 0.0000",
  "H -2.0740 -0.7640 0.8840",
  "H -2.0740 -0.7640 -0.8840",
  "H -0.4680 1.1740 0.8780",
  "H -0.4680 1.1740 -0.8780",
  "H 0.4680 -1.1740 0.8780",
  "H 0.4680 -1.1740 -0.8780",
  "H 2.7400 -0.6290 0.0000",
  "H 2.0740 0.7640 0.8840",
  "H 2.0740 0.7640 -0.8840",
];
const frame = (comment: string, x: string) =>
  `${ATOMS.length}\n${comment}\n${ATOMS.map((line, k) => (k === 3 ? `C 1.9480 0.1280 ${x}` : line)).join("\n")}\n`;

const SECTIONS = [
  "intake",
  "distinct-set",
  "populations",
  "columns",
  "levels",
  "averages",
  "trust",
  "hand-over",
  "logbook",
];

test("hostile text is text in every section, on paper and in figures as files (B05, B06, security E09)", async ({
  page,
}) => {
  test.slow();
  let ran = false;
  page.on("dialog", (dialog) => {
    ran = true;
    return dialog.dismiss();
  });
  await signUp(page, "Careful", `careful.${randomUUID()}@lab.example`);
  const team = /teams\/([a-z2-7]{16})/.exec(page.url())?.[1] ?? "";
  // Sent as the page sends it, so that no question is asked about the level.
  const id = await page.evaluate(
    async ({ content, fields, name }) => {
      const form = new FormData();
      for (const [key, value] of Object.entries(fields)) form.append(key, value);
      form.append("file", new Blob([content]), name);
      const answer = await fetch("/files/upload", { method: "POST", body: form });
      return ((await answer.json()) as { id: string }).id;
    },
    {
      content:
        frame(`name="${SCRIPT}" energy=-1.5 note='${IMAGE}' <b>=1.5`, "0.0000") +
        frame(`name=javascript:alert(666) energy=-1.25 note='{{7*7}}' <b>=2.5`, "0.0600"),
      fields: {
        team,
        level: `L ${SCRIPT}`,
        energyUnit: "kcal/mol",
        energyFrom: "key:energy",
        name: `E ${IMAGE}`,
      },
      name: `${IMAGE}.xyz`,
    },
  );
  for (const section of SECTIONS) {
    await page.goto(`/ensembles/${id}/${section}`);
    await hydrated(page);
    await expect(page.getByRole("heading", { level: 1 }).first()).toBeVisible();
    expect(await page.locator("img[src='x'], [onerror], a[href^='javascript:']").count(), section).toBe(0);
    await page.emulateMedia({ media: "print" });
    expect(await page.locator("img[src='x'], [onerror]").count(), section).toBe(0);
    await page.emulateMedia({ media: null });
  }
  expect(ran).toBe(false);

  await page.goto(`/ensembles/${id}/populations`);
  await hydrated(page);
  const svgButton = page.getByRole("button", { name: "SVG" }).first();
  await expect(svgButton).toBeVisible({ timeout: 30_000 });
  const svgFile = page.waitForEvent("download");
  await svgButton.click();
  const svg = readFileSync(await (await svgFile).path(), "utf8");
  expect(svg).toContain("<svg");
  expect(svg).not.toMatch(/<script|<foreignObject|<a[\s>]|href\s*=|\son\w+\s*=|javascript:/i);
  const pngFile = page.waitForEvent("download");
  await page.getByRole("button", { name: "PNG" }).first().click();
  const png = readFileSync(await (await pngFile).path());
  const kinds: string[] = [];
  for (let at = 8; at < png.length; at += 12 + png.readUInt32BE(at))
    kinds.push(png.toString("latin1", at + 4, at + 8));
  // Text, time and EXIF would be tEXt, zTXt, iTXt, tIME, eXIf (PNG specification, W3C, 3rd edition, section 11).
  expect(kinds.filter((kind) => !["IHDR", "sRGB", "gAMA", "pHYs", "IDAT", "IEND"].includes(kind))).toEqual(
    [],
  );
});

test("signing out clears what the browser kept, and closes the page (B08)", async ({ page }) => {
  await signUp(page, "Leaving", `leaving.${randomUUID()}@lab.example`);
  const team = page.url();
  await page.evaluate(() => {
    localStorage.setItem("kept", "1");
    sessionStorage.setItem("kept", "1");
  });
  await page.evaluate(async () => {
    await fetch("/logout", { method: "POST" });
  });
  expect(await page.evaluate(() => localStorage.getItem("kept"))).toBeNull();
  await page.goto(team);
  await page.waitForURL(/\/login/);
});
