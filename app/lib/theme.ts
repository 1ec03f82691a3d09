/** Day or night chart: null follows the system. Kept in a cookie, so that the first paint is already right. */
export type Theme = "light" | "dark";

export const THEME_COOKIE = "theme";
const YEAR_S = 365 * 24 * 3600;

/** The theme that a form or a cookie names; anything else follows the system. */
export function parseTheme(text: unknown): Theme | null {
  return text === "light" || text === "dark" ? text : null;
}

/**
 * The theme from a request's Cookie header.
 *
 * @example readThemeCookie("a=1; theme=dark") // "dark"
 */
export function readThemeCookie(header: string | null): Theme | null {
  for (const pair of (header ?? "").split(";")) {
    const [name, value] = pair.trim().split("=");
    if (name === THEME_COOKIE) return parseTheme(value);
  }
  return null;
}

/** The Set-Cookie header that keeps the choice for a year, or forgets it. It holds no secret; scripts have no use for it. */
export function writeThemeCookie(theme: Theme | null): string {
  const shared = "Path=/; HttpOnly; SameSite=Lax";
  return theme === null
    ? `${THEME_COOKIE}=; Max-Age=0; ${shared}`
    : `${THEME_COOKIE}=${theme}; Max-Age=${YEAR_S}; ${shared}`;
}
