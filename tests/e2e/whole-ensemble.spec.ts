import { readFileSync } from "node:fs";
import { expect, expectAccessible, openDemo, test } from "./base";

const file = readFileSync(
  new URL("../../fixtures/reference/ensembles/aryl-ether.xyz", import.meta.url),
  "utf8",
);

const ETHER = "4-tert-Butylphenyl 4-(trifluoromethyl)phenyl ether";

test.describe("where the tolerance stands", () => {
  // The sift that the slider asks for is cut off, to see what stands before its answer.
  test.use({ allowRefusals: true });

  test("the count against it is drawn, and follows the slider before the server has answered", async ({
    page,
  }) => {
    await openDemo(page, "1,2-Difluoroethane", "distinct-set");
    await expect(page.getByText(/36\ssifts of all frames/)).toBeVisible();
    // Three minima, the gauche pair merged: two shapes between the noise of the copies and what tells them apart.
    await expect(page.getByText(/The count stays at 2 at every tolerance counted/)).toBeVisible();
    await page.getByRole("button", { name: "Table of How the count hangs on the tolerance" }).click();
    await expect(
      page.getByRole("table", { name: "How the count hangs on the tolerance" }).getByRole("row"),
    ).toHaveCount(13);
    const asked: string[] = [];
    await page.route("**/files/ensembles/*/sifts", async (route) => {
      asked.push(route.request().method());
      await route.abort();
    });
    const slider = page.getByRole("slider", { name: "RMSD tolerance" });
    await slider.focus();
    for (let k = 0; k < 6; k++) await page.keyboard.down("PageUp");
    await expect(page.getByText(/shapes? at 0\.\d+\sÅ/)).toBeVisible();
  });

  test("pairs nearest to the cut are laid over each other", async ({ page }) => {
    await openDemo(page, "N-Acetyl-L-alanine N-methylamide", "distinct-set");
    const pairs = page.getByRole("table", { name: /^Pairs nearest to the cut/ });
    await expect(pairs.getByText(/kept apart above, merged below/)).toBeVisible();
    await pairs
      .getByRole("button", { name: /^c\d+ and c\d+$/ })
      .first()
      .press("Enter");
    const picture = page.getByText(/^c\d+ laid over c\d+: (same hand|mirror image), RMSD/);
    await expect(picture).toBeVisible();
    const words = await picture.textContent();
    await page.reload();
    await expect(picture).toHaveText(words ?? "");
    await expect(page.getByRole("heading", { name: "How near the frames lie" })).toBeVisible();
    await expect(page.getByRole("heading", { name: /^Nearest to c\d+$/ })).toBeVisible();
  });

  test("the distances of all pairs are computed when asked for, and downloaded", async ({ page }) => {
    await openDemo(page, "N-Acetyl-L-alanine N-methylamide", "distinct-set");
    await page.getByRole("button", { name: /^Compute \d+ distances$/ }).press("Enter");
    const link = page.locator("a[href$='/distances.csv']");
    await expect(link).toBeVisible();
    const answer = await page.request.get((await link.getAttribute("href")) ?? "");
    expect((await answer.text()).split("\r\n")[0]).toBe("frame,other,rmsd [Å]");
  });
});

test.describe("an outside structure", () => {
  test.use({ allowRefusals: true });
  test("is laid beside the ensemble without its hydrogens, deleted, and brought back", async ({ page }) => {
    await openDemo(page, ETHER, "compare");
    await expect(page.getByText("No structure from outside lies beside this ensemble.")).toBeVisible();
    const lines = file.split("\n");
    const atoms = lines.slice(2, 2 + Number(lines[0])).filter((line) => !/^\s*H\b/.test(line));
    const pose = [atoms.length, "bound pose", ...atoms.reverse(), ""].join("\n");
    const send = async (name: string, text: string) => {
      await page.getByLabel("Crystal or bound pose, as XYZ or SDF").setInputFiles({
        name,
        mimeType: "chemical/x-xyz",
        buffer: Buffer.from(text),
      });
      await page.getByRole("button", { name: "Lay it beside the ensemble" }).click();
    };
    await send("water.xyz", "3\nwater\nO 0 0 0\nH 0.96 0 0\nH -0.24 0.93 0\n");
    await expect(page.getByText(/it is another molecule/).first()).toBeVisible();
    await send("pose.xyz", pose);
    await expect(page.getByText(/^pose\.xyz is nearest to c\d+, 0\.00\sÅ away/)).toBeVisible();
    await expect(page.getByText("It takes no part in populations", { exact: false }).first()).toBeVisible();
    await expect(page.getByText("It shows no hydrogens", { exact: false })).toBeVisible();
    await expectAccessible(page);
    await page.getByRole("button", { name: "Delete pose.xyz" }).click();
    await expect(page.getByText("No structure from outside lies beside this ensemble.")).toBeVisible();
    await page.getByRole("button", { name: "Undo" }).click();
    await expect(page.getByText(/^pose\.xyz is nearest to c\d+/)).toBeVisible();
  });
});
