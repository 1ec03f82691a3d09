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

const NEW_PASSWORD = "seven brown kettles sing";

/** What forms name as the page that they come from. */
const ORIGIN = `http://127.0.0.1:${process.env.E2E_PORT}`;

/** Sends a form as the page does without its script, and fails unless it is taken. */
async function sendForm(page: Page, path: string, form: Record<string, string>): Promise<void> {
  const answer = await page.request.post(path, { form, headers: { origin: ORIGIN }, maxRedirects: 0 });
  expect(answer.status(), path).toBe(303);
}

type Who = "owner" | "analyst" | "reader" | "outsider";

/**
 * Signs in as one of the demo people without opening a page (doors.spec.ts does it by the form).
 *
 * @returns their first team, the origin that forms name, and what finds the addresses of the team's ensembles by their names
 */
export async function enter(page: Page, who: Who = "analyst") {
  await sendForm(page, "/login", { email: `${who}@lowlying.example`, password: DEMO_PASSWORD });
  const answer = await page.request.get("/teams");
  const [, team = ""] = /\/teams\/([a-z2-7]{16})$/.exec(answer.url()) ?? [];
  expect(team, "leads to a team").not.toBe("");
  return { team, origin: ORIGIN, ensembles: ensemblesOf(await answer.text()) };
}

function ensemblesOf(html: string): (name: string) => string {
  const links = [...html.matchAll(/<a\b[^>]*href="(\/ensembles\/[a-z2-7]{16})[^"]*"[^>]*>([^<]+)<\/a>/g)];
  return (name) => {
    const found = links.find(([, , text]) => text === name)?.[1];
    if (found === undefined) throw new Error(`The team has no ensemble called ${name}.`);
    return found;
  };
}

/** Signs in as one of the demo people and opens their first team. */
export async function signIn(page: Page, who: Who = "analyst"): Promise<void> {
  const { team } = await enter(page, who);
  await page.goto(`/teams/${team}`);
}

/** Opens a section of an ensemble that the analyst's team has from the start. */
export async function openDemo(
  page: Page,
  name: string,
  section: string,
  who: Who = "analyst",
): Promise<string> {
  const address = (await enter(page, who)).ensembles(name);
  await page.goto(`${address}/${section}`);
  await hydrated(page);
  return address;
}

/** A new person by open sign-up, signed in, on the page of a team of their own. */
export async function signUp(page: Page, name: string, email: string): Promise<void> {
  await sendForm(page, "/sign-up", { name, email, password: NEW_PASSWORD });
  await sendForm(page, "/login", { email, password: NEW_PASSWORD });
  await page.goto("/teams");
  await page.waitForURL(/\/teams\/[a-z2-7]{16}$/);
}

/** The same by the forms. */
export async function signUpByForm(page: Page, name: string, email: string): Promise<void> {
  await page.goto("/sign-up");
  await page.getByLabel("Name, as the logbook shows it").fill(name);
  await page.getByLabel("Address").fill(email);
  await page.getByLabel("Password").fill(NEW_PASSWORD);
  await page.getByRole("button", { name: "Sign up" }).click();
  await page.waitForURL(/\/login\?signed-up$/);
  // What was typed a moment ago need not be typed again.
  await expect(page.getByLabel("Address")).toHaveValue(email);
  await expect(page.getByLabel("Password")).toBeFocused();
  await page.keyboard.type(NEW_PASSWORD);
  await page.getByRole("button", { name: "Sign in" }).click();
  await page.waitForURL(/\/teams\/[a-z2-7]{16}$/);
}

/** Two widths in two themes: what differs between the others does so at one of these. */
const LOOKS = [
  { width: 1440, colorScheme: "light" },
  { width: 390, colorScheme: "dark" },
] as const;

/** A page that is open, by day at full width and by night on a phone: accessible, and nothing scrolls sideways. */
export async function expectAccessibleEverywhere(
  page: Page,
  name: string,
  without: string[] = [],
): Promise<void> {
  for (const { width, colorScheme } of LOOKS) {
    await test.step(`${name} is accessible at ${width} px, ${colorScheme}`, async () => {
      await page.emulateMedia({ colorScheme });
      await page.setViewportSize({ width, height: 900 });
      await expectAccessible(page, without);
      await expectNoSideways(page, `${name} at ${width} px`);
    });
  }
}

/** Figures are drawn at the width of their place once it is known. */
export async function expectNoSideways(page: Page, name: string): Promise<void> {
  const over = () => page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth);
  await expect.poll(over, { message: `${name} scrolls sideways` }).toBeLessThanOrEqual(0);
}

/** The link in the newest letter to an address, as the page of kept letters shows it. */
export async function letterLink(page: Page, email: string, path: string): Promise<string> {
  let found: string | null = null;
  await expect(async () => {
    await page.goto("/mail");
    const letter = page
      .getByRole("article")
      .filter({ hasText: email })
      .filter({ hasText: `/${path}/` })
      .first();
    found = await letter.getByRole("link").first().getAttribute("href", { timeout: 1000 });
  }).toPass();
  return found ?? "";
}

/** Fails on what axe finds serious or critical, by rule and element; `without` names rules that do not fit what is open. */
export async function expectAccessible(page: Page, without: string[] = []): Promise<void> {
  // Colours on their way from one theme to the other have a contrast that nobody reads.
  await page.waitForFunction(() =>
    document
      .getAnimations()
      .every(
        ({ playState, effect }) =>
          playState !== "running" || effect?.getComputedTiming().iterations === Number.POSITIVE_INFINITY,
      ),
  );
  const found = await new AxeBuilder({ page })
    .disableRules(without)
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
