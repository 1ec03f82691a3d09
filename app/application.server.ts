import { createRequestHandler, RouterContextProvider, type ServerBuild } from "react-router";
import { addressContext } from "./context.ts";
import { env } from "./env.server.ts";
import { DomainError } from "./lib/errors.ts";
import { isApiPath } from "./middleware/api-path.server.ts";
import { securityHeaders } from "./middleware/security-headers.server.ts";
import { boot, shutDown } from "./services/boot.server.ts";
import { shutDownJobs } from "./services/jobs/shutdown.server.ts";
import { log } from "./services/log.server.ts";

/** Calls that carry files; their own readers count the bytes. Everything else is a small form or a small JSON. */
const UPLOADS =
  /^\/+(files\/upload|api\/v1\/ensembles|(api\/v1|files)\/ensembles\/[^/]+\/(files|columns))\/?(\.data)?$/i;
const SMALL_BODY_BYTES = 2 ** 20;
/** One structure from outside and the fields beside it; read as a form, so bounded here too. */
const OUTSIDE = /^\/+ensembles\/[^/]+\/compare\/?(\.data)?$/i;
const OUTSIDE_BODY_BYTES = 9 * 2 ** 20;

/** Most bytes that the body of a request to this address may have; null where its route counts them itself. */
export function bodyLimit(pathname: string): number | null {
  if (OUTSIDE.test(pathname)) return OUTSIDE_BODY_BYTES;
  return UPLOADS.test(pathname) ? null : SMALL_BODY_BYTES;
}

/** What reading a body throws beyond its limit; routes turn it into 413. */
export function bodyTooLarge(limit: number): DomainError {
  const mebibytes = limit / 2 ** 20;
  return new DomainError("too-large", "Too large", `At most ${mebibytes} MB can be sent to this address.`);
}

/**
 * Address of the caller. Behind `trusted` proxies of ours it is the entry that the outermost of them wrote; what a
 * caller wrote before it counts for nothing.
 *
 * @example clientAddress("127.0.0.1", "6.6.6.6, 192.0.2.7", 1) // "192.0.2.7"
 */
export function clientAddress(peer: string, forwarded: string | undefined, trusted: number): string {
  if (trusted === 0 || forwarded === undefined) return peer;
  const entries = forwarded.split(",").map((entry) => entry.trim());
  const entry = entries[Math.max(0, entries.length - trusted)] ?? "";
  return /^[0-9a-f.:]{2,45}$/i.test(entry) ? entry : peer;
}

/**
 * The router answers addresses that end in ".data" in a format of its own, for its pages. The API has none: with a slash
 * behind it the address is one like any other. The body goes over as it is, unread.
 */
function asCall(request: Request): Request {
  const url = new URL(request.url);
  if (!isApiPath(url.pathname) || !url.pathname.endsWith(".data")) return request;
  url.pathname += "/";
  const { method, headers, body, signal } = request;
  return new Request(url, { method, headers, body, signal, ...(body === null ? {} : { duplex: "half" }) });
}

/**
 * The router's handler. An Origin that is no address would be answered by the router itself, before any middleware and
 * without our headers; as "null" it comes to our own check, which refuses it all the same. The header is set on the
 * request as it came: a copy of a request begins to read the body, which nobody then reads to its end.
 */
function makeHandler(build: ServerBuild | (() => Promise<ServerBuild>), mode: string) {
  const handle = createRequestHandler(build, mode);
  return (given: Request, context: RouterContextProvider): Promise<Response> => {
    const request = asCall(given);
    const origin = request.headers.get("origin");
    if (origin !== null && !URL.canParse(origin)) request.headers.set("origin", "null");
    return handle(request, context);
  };
}

function makeContext(address: string): RouterContextProvider {
  const context = new RouterContextProvider();
  context.set(addressContext, address);
  return context;
}

/** What the process around the server build (`scripts/lib/serve.mjs`) needs of the application. */
export const application = {
  boot,
  endJobs: shutDownJobs,
  shutDown,
  env,
  log,
  bodyLimit,
  bodyTooLarge,
  clientAddress,
  makeContext,
  makeHandler,
  /** For what the router does not answer: built assets, addresses that cannot be read. */
  plainHeaders: () => securityHeaders({ nonce: "", secure: env().secure }),
};
