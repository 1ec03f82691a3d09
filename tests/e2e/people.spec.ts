import type { Browser, BrowserContext, Page } from "@playwright/test";
import { expect, expectAccessible, hydrated, letterLink, signIn, signUp, test } from "./base";

// A wrong password is among what is tried.
test.use({ allowRefusals: true });

/** A new person in a browser of their own, by open sign-up: owner of a team of their own. */
async function newOwner(page: Page, name: string, email: string): Promise<string> {
  await signUp(page, name, email);
  return page.url();
}

async function otherBrowser(browser: Browser, baseURL: string | undefined): Promise<[BrowserContext, Page]> {
  const context = await browser.newContext({ baseURL });
  return [context, await context.newPage()];
}

const unique = () => Math.random().toString(36).slice(2, 10);

test("an owner invites by mail; the newcomer joins once, and a new role counts at once", async ({
  page,
  browser,
  baseURL,
}) => {
  const [owner, guest] = [`o${unique()}@lab.example`, `g${unique()}@lab.example`];
  const team = await newOwner(page, "Ada Quist", owner);
  await page.getByRole("link", { name: "People" }).click();
  await hydrated(page);
  await expect(page.getByText("cannot leave")).toBeVisible();
  await page.getByLabel("Address").fill(guest);
  await page.getByRole("button", { name: "Send invitation" }).click();
  await expect(page.getByText(`An invitation goes to ${guest}.`)).toBeVisible();
  await expect(page.getByText("waits for an answer")).toBeVisible();
  await expectAccessible(page);

  const [context, second] = await otherBrowser(browser, baseURL);
  const link = await letterLink(second, guest, "invitation");
  await second.goto(link);
  await expectAccessible(second);
  await second.getByLabel("Name, as the logbook shows it").fill("Bo Ferrant");
  await second.getByLabel("Password").fill("nine slow herons wade");
  await second.getByRole("button", { name: /^Join/ }).click();
  await second.waitForURL(/\/teams\/[a-z2-7]{16}$/);
  expect(second.url()).toBe(team);
  await expect(second.getByRole("button", { name: "Drop or choose files" })).toHaveCount(0);
  // The link worked once.
  await second.goto(link);
  await expect(second.getByRole("heading", { name: "No open invitation here" })).toBeVisible();

  await page.reload();
  await hydrated(page);
  await page.getByLabel("Role of Bo Ferrant").selectOption("analyst");
  await expect(page.getByText("The role is analyst now.")).toBeVisible();
  await second.goto(`${team}/tokens`);
  await expect(second.getByText("All that you may")).toBeVisible();

  await page.getByRole("button", { name: "Remove Bo Ferrant" }).click();
  await page.getByRole("button", { name: "Remove from the team" }).click();
  await expect(page.getByText("Bo Ferrant")).toHaveCount(0);
  const answer = await second.goto(team);
  expect(answer?.status()).toBe(404);
  await context.close();
});

test("an account shows its sessions, changes its password and its address", async ({
  page,
  browser,
  baseURL,
}) => {
  const [first, next] = [`a${unique()}@lab.example`, `b${unique()}@lab.example`];
  await newOwner(page, "Ada Quist", first);
  const [context, second] = await otherBrowser(browser, baseURL);
  await second.goto("/login");
  await second.getByLabel("Address").fill(first);
  await second.getByLabel("Password").fill("seven brown kettles sing");
  await second.getByRole("button", { name: "Sign in" }).click();
  await second.waitForURL(/\/teams\//);

  await page.goto("/account");
  await hydrated(page);
  await expect(page.getByText("Two sessions are open.")).toBeVisible();
  await expectAccessible(page);
  await page.getByRole("button", { name: "End all others" }).click();
  await expect(page.getByText("All other sessions are ended.")).toBeVisible();
  await second.goto("/account");
  await expect(second.getByRole("heading", { name: "Sign in" })).toBeVisible();

  await page.getByLabel("Current password").fill("not the right one at all");
  await page.getByLabel("New password").fill("eight wet stones shine");
  await page.getByRole("button", { name: "Change the password" }).click();
  await expect(page.getByText("This is not your password.")).toBeVisible();
  await page.getByLabel("Current password").fill("seven brown kettles sing");
  await page.getByLabel("New password").fill("eight wet stones shine");
  await page.getByRole("button", { name: "Change the password" }).click();
  await expect(page.getByText("The password is changed, and every other session ended.")).toBeVisible();

  await page.getByLabel("New address").fill(next);
  await page.getByLabel("Password", { exact: true }).first().fill("eight wet stones shine");
  await page.getByRole("button", { name: "Change the address" }).click();
  await expect(page.getByText("A letter goes to the new address.")).toBeVisible();
  await page.goto(await letterLink(page, next, "confirm-address"));
  await page.getByRole("button", { name: "Use this address" }).click();
  await expect(page.getByText(`The address ${next} is confirmed.`)).toBeVisible();
  await context.close();
});

test("a reader sees who is in the team and cannot change it", async ({ page }) => {
  await signIn(page, "reader");
  await page.getByRole("link", { name: "People" }).click();
  await expect(page.getByRole("heading", { name: "People of Estuary" })).toBeVisible();
  await expect(page.getByText("Invite somebody")).toHaveCount(0);
  await expect(page.getByLabel(/^Role of/)).toHaveCount(0);
  await expect(page.getByText("Delete the team")).toHaveCount(0);
});
