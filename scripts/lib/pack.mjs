// Text answers of the application, packed on their way out where the caller unpacks them. What is packed already
// (pictures, archives) and what does not get shorter (coordinates as doubles) goes as it is.
import { constants, createGzip } from "node:zlib";

const WORTH_PACKING =
  /^(text\/|chemical\/|image\/svg\+xml|application\/([a-z0-9.-]+\+)?(json|xml|javascript)|application\/x-ndjson)/i;
/** Below this the head of the packing costs what it saves. */
const LEAST_BYTES = 1024;

/**
 * True where a caller says that it unpacks gzip.
 *
 * @example acceptsGzip("br;q=1.0, gzip;q=0.8") // true
 * @example acceptsGzip("gzip;q=0, identity") // false
 */
export function acceptsGzip(header) {
  const weights = new Map();
  for (const part of (header ?? "").toLowerCase().split(",")) {
    const [name, ...parameters] = part.split(";").map((text) => text.trim());
    const q = parameters.find((text) => /^q\s*=/.test(text));
    weights.set(name, q === undefined ? 1 : Number(q.split("=")[1]));
  }
  return (weights.get("gzip") ?? weights.get("x-gzip") ?? weights.get("*") ?? 0) > 0;
}

/** True where an answer is text that would travel packed if the caller could take it: its `Vary` then says so. */
export function isPackable(headers) {
  return (
    WORTH_PACKING.test(headers.get("content-type") ?? "") &&
    !headers.has("content-encoding") &&
    !headers.has("content-range") &&
    // A strong tag names the bytes as they are.
    !/^"/.test(headers.get("etag") ?? "") &&
    !/\bno-transform\b/i.test(headers.get("cache-control") ?? "")
  );
}

/**
 * Writes into the head of an answer how it travels.
 *
 * @param {import("node:http").IncomingMessage} incoming the request
 * @param {Response} answer what the application gave
 * @returns the headers to send, and the packing for the body; null where it goes as it is
 */
export function packing(incoming, answer) {
  const headers = new Headers(answer.headers);
  if (!isPackable(headers)) return { headers, packer: null };
  const vary = headers.get("vary");
  if (vary !== "*" && !/\baccept-encoding\b/i.test(vary ?? "")) headers.append("vary", "Accept-Encoding");
  const length = headers.get("content-length");
  const worth = length === null || Number(length) >= LEAST_BYTES;
  const packs =
    answer.body !== null &&
    worth &&
    incoming.method !== "HEAD" &&
    acceptsGzip(incoming.headers["accept-encoding"]);
  if (!packs) return { headers, packer: null };
  headers.set("content-encoding", "gzip");
  headers.delete("content-length");
  // A page comes in pieces, and each must be read when it comes, not when the packer has had enough.
  return { headers, packer: createGzip({ level: 5, flush: constants.Z_SYNC_FLUSH }) };
}
