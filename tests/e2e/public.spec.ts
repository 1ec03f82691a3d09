import { expect, expectAccessibleEverywhere, hydrated, test } from "./base";

test.describe("the public page", () => {
  test("shows the example without an account, and weighs it as the thermometer moves", async ({ page }) => {
    await page.goto("/");
    await hydrated(page);
    await expect(page.getByText(/at 298\.15\sK/).first()).toBeVisible();
    const asked: string[] = [];
    page.on("request", (request) => asked.push(request.url()));
    const slider = page.getByRole("slider", { name: "Temperature" });
    await slider.focus();
    await page.keyboard.press("End");
    await expect(page.getByText(/of the ensemble at 1000\sK/).first()).toBeVisible();
    await page.keyboard.press("PageDown");
    await expect(slider).toHaveAttribute("aria-valuetext", "990 K");
    await page.getByLabel("Temperature, typed").fill("253");
    await page.keyboard.press("Enter");
    await expect(page.getByText(/of the ensemble at 253\sK/).first()).toBeVisible();
    expect(asked.filter((url) => !url.includes("/assets/"))).toEqual([]);

    await test.step("refuses a temperature that is none, and says what would be right", async () => {
      const field = page.getByLabel("Temperature, typed");
      await field.fill("-5");
      await page.keyboard.press("Enter");
      await expect(page.getByText("A temperature from 100 to 1000 K, for example 298.15.")).toBeVisible();
      await page.keyboard.press("Escape");
      await expect(field).toHaveValue("253");
    });

    await test.step("opens the example", async () => {
      await page.getByRole("link", { name: "Open this example" }).click();
      await expect(page).toHaveURL(/\/ensembles\/[a-z2-7]{16}\/populations/);
      await expect(page.getByRole("heading", { name: "Populations", exact: true })).toBeVisible();
    });
  });

  test("reads without script", async ({ browser, baseURL }) => {
    const context = await browser.newContext({ baseURL, javaScriptEnabled: false });
    const page = await context.newPage();
    await page.goto("/");
    await expect(page.getByText(/of the ensemble at 298\.15\sK/).first()).toBeVisible();
    await expect(page.getByRole("link", { name: "Open this example" })).toBeVisible();
    await context.close();
  });

  test("is accessible by day and by night, with its reference pages", async ({ page }) => {
    // Three pages, two of them long, each looked at twice.
    test.slow();
    for (const path of ["/", "/formats", "/methods#caution"]) {
      await page.goto(path);
      await hydrated(page);
      await expectAccessibleEverywhere(page, path);
    }
    // What results are no basis for.
    await expect(
      page.getByText("no basis for decisions on dosing, safety or regulatory matters"),
    ).toBeVisible();
  });
});
