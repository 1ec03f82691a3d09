import type { DomainError } from "../lib/errors.ts";
import { pageError, problemResponse } from "../services/http.server.ts";

/** True for addresses that programs call: they get a problem document where a person gets a page. */
export function isForPrograms(url: URL): boolean {
  return /^\/+(api|files|healthz|readyz)(\/|$)/i.test(url.pathname);
}

/**
 * Refuses a request before its route runs, in the form its caller reads: returns a problem document, or throws to
 * the error page.
 */
export function refuse(url: URL, error: DomainError, requestId: string): Response {
  if (isForPrograms(url)) return problemResponse(error);
  throw pageError(error, requestId);
}
