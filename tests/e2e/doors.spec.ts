import {
  DEMO_PASSWORD,
  expect,
  expectAccessibleEverywhere,
  hydrated,
  signIn,
  signUpByForm,
  test,
} from "./base";

test.describe("the doors", () => {
  test("let the analyst in by keyboard alone, and out again", async ({ page }) => {
    await page.goto("/login");
    await page.getByLabel("Address").focus();
    await page.keyboard.type("analyst@lowlying.example");
    await page.keyboard.press("Tab");
    await page.keyboard.type(DEMO_PASSWORD);
    await page.keyboard.press("Enter");
    await page.waitForURL(/\/teams\/[a-z2-7]{16}$/);
    await page.getByRole("button", { name: /Account of Demo analyst/ }).press("Enter");
    await page.getByRole("button", { name: "Sign out" }).press("Enter");
    await page.waitForURL("/");
    await page.goto("/teams");
    await expect(page).toHaveURL(/\/login\?to=/);
  });

  test("lead back to the page that was wanted", async ({ page }) => {
    await signIn(page);
    const wanted = new URL(page.url()).pathname;
    await page.context().clearCookies();
    await page.goto(`${wanted}/tokens`);
    await expect(page).toHaveURL(/\/login\?to=/);
    await page.getByLabel("Address").fill("analyst@lowlying.example");
    await page.getByLabel("Password").fill(DEMO_PASSWORD);
    await page.getByRole("button", { name: "Sign in" }).click();
    await expect(page).toHaveURL(`${wanted}/tokens`);
  });

  test("open a team of one's own to a new user", async ({ page }) => {
    await signUpByForm(page, "Ada Quist", `ada.${Date.now()}@lab.example`);
    await expect(page.getByText("Ada Quist's team").first()).toBeVisible();
  });
});

test.describe("refusals", () => {
  test.use({ allowRefusals: true });

  test("and doors are accessible by day and by night", async ({ page }) => {
    // Five pages, each looked at twice.
    test.slow();
    for (const path of [
      "/login",
      "/sign-up",
      "/reset-password",
      "/reset-password/no-such-link",
      "/no/such/page",
    ]) {
      await page.goto(path);
      await hydrated(page);
      await expectAccessibleEverywhere(page, path);
    }
  });

  test("stand beside the form, which keeps the address", async ({ page }) => {
    await page.goto("/login");
    await hydrated(page);
    await page.getByLabel("Address").fill("analyst@lowlying.example");
    await page.getByLabel("Password").fill("not the right one");
    await page.getByRole("button", { name: "Sign in" }).click();
    await expect(page.getByRole("alert").filter({ hasText: "do not belong together" })).toBeVisible();
    await expect(page.getByLabel("Address")).toHaveValue("analyst@lowlying.example");
  });

  test("work without script too", async ({ browser, baseURL }) => {
    const context = await browser.newContext({ javaScriptEnabled: false, baseURL });
    const page = await context.newPage();
    await page.goto("/login");
    await page.getByLabel("Address").fill("reader@lowlying.example");
    await page.getByLabel("Password").fill("not the right one");
    await page.getByRole("button", { name: "Sign in" }).click();
    await expect(page.getByRole("alert")).toContainText("do not belong together");
    await page.getByLabel("Password").fill(DEMO_PASSWORD);
    await page.getByRole("button", { name: "Sign in" }).click();
    await page.waitForURL(/\/teams\/[a-z2-7]{16}$/);
    await context.close();
  });
});
