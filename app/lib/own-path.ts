/**
 * A redirect target of our own: the path and query as given, or the fallback for anything that could lead elsewhere
 * (other hosts, backslashes, encoded slashes in front, control characters).
 *
 * @example ownPath("/teams?x=1", "/") // "/teams?x=1"
 * @example ownPath("//evil.example", "/") // "/"
 */
export function ownPath(target: unknown, fallback: string): string {
  if (typeof target !== "string" || target.length > 2000) return fallback;
  // One slash, then neither a slash nor a backslash, plain or encoded: browsers read those as another host.
  if (!/^\/(?![/\\]|%2f|%5c)/i.test(target)) return fallback;
  // biome-ignore lint/suspicious/noControlCharactersInRegex: browsers drop them, so "/\t/evil" would be "//evil"
  if (/[\u0000-\u0020\u007f\\]/.test(target)) return fallback;
  const base = "http://own.invalid";
  if (!URL.canParse(target, base)) return fallback;
  const url = new URL(target, base);
  // Dots may fold a path into one that begins with two slashes.
  if (url.origin !== base || url.pathname.startsWith("//")) return fallback;
  return url.pathname + url.search + url.hash;
}
