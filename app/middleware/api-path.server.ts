/**
 * True for the calls of the API. They are judged by their token alone: cookies count for nothing there, so there is
 * nothing that a page of another site could borrow. Matched as the router matches, whatever the case of the letters.
 *
 * @example isApiPath("/api/v1/ensembles") // true
 * @example isApiPath("/api") // false: the page that describes them
 */
export function isApiPath(pathname: string): boolean {
  return /^\/+api\/v1(\/|$)/i.test(pathname);
}
