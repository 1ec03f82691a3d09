import { AxeBuilder } from "@axe-core/playwright";
import { test as base, expect, type Page } from "@playwright/test";

/** The demo password of the server that the browser tests start (scripts/e2e-server.mjs). */
export const DEMO_PASSWORD = "walk-through-the-house";

/** Answers that a test provokes; the browser writes each of them to the console. */
const PROVOKED =
  /^Failed to load resource: (the server responded with a status of (4\d\d|503)|net::ERR_FAILED)/;

/**
 * `test` whose page fails it on a breach of the content security policy, an error of a script, an error in the
 * console, and a request to another host. `allowRefusals` lets the browser's lines about refused requests pass.
 */
export const test = base.extend<{ allowRefusals: boolean; faults: string[] }>({
  allowRefusals: [false, { option: true }],
  faults: [
    async ({ page, baseURL, allowRefusals }, use) => {
      const faults: string[] = [];
      const own = new URL(baseURL ?? "http://127.0.0.1").origin;
      page.on("pageerror", (error) => faults.push(`error: ${error.message}`));
      page.on("console", (message) => {
        const text = message.text();
        if (message.type() === "error" && !(allowRefusals && PROVOKED.test(text))) {
          faults.push(`console: ${text}`);
        }
      });
      page.on("request", (request) => {
        const url = new URL(request.url());
        if (/^https?:$/.test(url.protocol) && url.origin !== own) faults.push(`elsewhere: ${url.href}`);
      });
      await page.addInitScript(() => {
        document.addEventListener("securitypolicyviolation", (event) => {
          console.error(`policy: ${event.violatedDirective} refused ${event.blockedURI} ${event.sample}`);
        });
      });
      await use(faults);
      expect(faults).toEqual([]);
    },
    { auto: true },
  ],
});

export { expect };

/** Signs in as one of the demo people and waits for their first team. */
export async function signIn(page: Page, who: "owner" | "analyst" | "reader" | "outsider" = "analyst") {
  await page.goto("/login");
  await page.getByLabel("Address").fill(`${who}@lowlying.example`);
  await page.getByLabel("Password").fill(DEMO_PASSWORD);
  await page.getByRole("button", { name: "Sign in" }).click();
  await page.waitForURL(/\/teams\/[a-z2-7]{16}$/);
}

/** A new person by open sign-up, signed in: owner of a team of their own. */
export async function signUp(page: Page, name: string, email: string): Promise<void> {
  const password = "seven brown kettles sing";
  await page.goto("/sign-up");
  await page.getByLabel("Name, as the logbook shows it").fill(name);
  await page.getByLabel("Address").fill(email);
  await page.getByLabel("Password").fill(password);
  await page.getByRole("button", { name: "Sign up" }).click();
  await page.waitForURL(/\/login\?signed-up$/);
  // What was typed a moment ago need not be typed again.
  await expect(page.getByLabel("Address")).toHaveValue(email);
  await page.getByLabel("Password").fill(password);
  await page.getByRole("button", { name: "Sign in" }).click();
  await page.waitForURL(/\/teams\/[a-z2-7]{16}$/);
}

/** Fails on what axe finds serious or critical, by rule and element. */
export async function expectAccessible(page: Page): Promise<void> {
  const found = await new AxeBuilder({ page })
    .withTags(["wcag2a", "wcag2aa", "wcag21aa", "wcag22aa"])
    .analyze();
  const serious = found.violations.filter(({ impact }) => impact === "serious" || impact === "critical");
  const told = serious.map(
    ({ id, nodes }) => `${id}: ${nodes.map(({ target }) => target.join(" ")).join(", ")}`,
  );
  expect(told).toEqual([]);
}

/** Waits until the page's script runs, so that what follows tests it and not the plain form. */
export async function hydrated(page: Page): Promise<void> {
  await page.waitForFunction(() => {
    const root = document.body.firstElementChild;
    return root !== null && Object.keys(root).some((key) => key.startsWith("__reactFiber"));
  });
}
