const BROWSERS: readonly [RegExp, string][] = [
  [/edg(e|a|ios)?\//i, "Edge"],
  [/opr\/|opera/i, "Opera"],
  [/firefox|fxios/i, "Firefox"],
  [/chrom(e|ium)|crios/i, "Chrome or Chromium"],
  [/safari/i, "Safari"],
  [/curl/i, "curl"],
];
const SYSTEMS: readonly [RegExp, string][] = [
  [/windows/i, "Windows"],
  [/android/i, "Android"],
  [/iphone|ipad|ios/i, "iOS"],
  [/mac os|macintosh/i, "macOS"],
  [/linux|x11/i, "Linux"],
];

/**
 * Browser and system by what a browser calls itself; good enough to recognise one's own.
 *
 * @example browserWords("Mozilla/5.0 (X11; Linux x86_64; rv:140.0) Gecko/20100101 Firefox/140.0") // "Firefox, Linux"
 */
export function browserWords(userAgent: string | null): string {
  const find = (list: readonly [RegExp, string][]) =>
    list.find(([pattern]) => pattern.test(userAgent ?? ""))?.[1];
  const words = [find(BROWSERS), find(SYSTEMS)].filter((word) => word !== undefined);
  return words.length > 0 ? words.join(", ") : "a browser without a name";
}
