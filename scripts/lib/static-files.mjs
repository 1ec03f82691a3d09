import { createHash } from "node:crypto";
import { readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import { promisify } from "node:util";
import { gzip } from "node:zlib";

const TYPES = {
  ".css": "text/css; charset=utf-8",
  ".html": "text/html; charset=utf-8",
  ".ico": "image/x-icon",
  ".js": "text/javascript; charset=utf-8",
  ".json": "application/json",
  ".map": "application/json",
  ".mjs": "text/javascript; charset=utf-8",
  ".png": "image/png",
  ".svg": "image/svg+xml",
  ".txt": "text/plain; charset=utf-8",
  ".wasm": "application/wasm",
  ".webmanifest": "application/manifest+json",
  ".webp": "image/webp",
  ".woff": "font/woff",
  ".woff2": "font/woff2",
};
const WORTH_PACKING = /^(text\/|application\/(json|manifest)|image\/svg)/;
const pack = promisify(gzip);

/**
 * The built assets, by address. Only what lies in the folder at the start is ever sent, so that no address can lead
 * out of it. Files are small and few: they are kept in memory, packed once when first asked for so.
 */
export function loadStaticFiles(folder) {
  const files = new Map();
  for (const entry of readdirSync(folder, { recursive: true, withFileTypes: true })) {
    if (!entry.isFile()) continue;
    const file = path.join(entry.parentPath ?? entry.path, entry.name);
    const address = `/${path.relative(folder, file).split(path.sep).join("/")}`;
    const body = readFileSync(file);
    files.set(address, {
      body,
      packed: null,
      type: TYPES[path.extname(file)] ?? "application/octet-stream",
      tag: `"${createHash("sha256").update(body).digest("base64url").slice(0, 22)}"`,
      // The build puts a hash of the content into the name of everything below assets/.
      forever: address.startsWith("/assets/"),
    });
  }
  return files;
}

/** Sends a built file. @returns true when the request was for one */
export async function sendStatic(files, request, response, headers) {
  if (request.method !== "GET" && request.method !== "HEAD") return false;
  const found = files.get(request.url.split("?", 1)[0]);
  if (found === undefined) return false;
  const answer = {
    ...headers,
    "content-type": found.type,
    "cache-control": found.forever ? "public, max-age=31536000, immutable" : "public, max-age=3600",
    etag: found.tag,
    vary: "accept-encoding",
  };
  if (request.headers["if-none-match"] === found.tag) {
    response.writeHead(304, answer).end();
    return true;
  }
  let body = found.body;
  if (WORTH_PACKING.test(found.type) && /\bgzip\b/.test(request.headers["accept-encoding"] ?? "")) {
    found.packed ??= pack(found.body);
    body = await found.packed;
    answer["content-encoding"] = "gzip";
  }
  response.writeHead(200, { ...answer, "content-length": body.length });
  response.end(request.method === "HEAD" ? undefined : body);
  return true;
}
