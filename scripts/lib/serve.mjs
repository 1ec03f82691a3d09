// The server around the application: node:http, the built assets, and requests and responses carried over to the
// router's handler. It exists for what the router's own server does not do: our headers on assets, bodies read to
// their end on refusals, time limits on senders, and a shutdown that finishes what it began.
import { createServer } from "node:http";
import { pipeline, Readable } from "node:stream";
import { packing } from "./pack.mjs";
import { loadStaticFiles, sendStatic } from "./static-files.mjs";

/** Most bytes and longest time that an answered request may still send before its connection is cut. */
const DRAIN_BYTES = 2 * 2 ** 30;
const DRAIN_MS = 120_000;
const HEADERS_MS = 15_000;
const REQUEST_MS = 30 * 60_000;
const KEEP_ALIVE_MS = 20_000;

const SENDS_NOTHING = new Set(["GET", "HEAD"]);
const METHODS = new Set(["GET", "HEAD", "POST", "PUT", "PATCH", "DELETE", "OPTIONS"]);

/** Bytes of a body that were taken so far, whoever took them. */
const taken = new WeakMap();

/** Chunks of a body, counted. Leaving early must not cut the connection: the answer still goes over it. */
async function* counted(incoming, limit, tooLarge) {
  let bytes = 0;
  for await (const chunk of incoming.iterator({ destroyOnReturn: false })) {
    bytes += chunk.length;
    taken.set(incoming, bytes);
    if (limit !== null && bytes > limit) throw tooLarge(limit);
    yield chunk;
  }
}

function headersOf(incoming) {
  const headers = new Headers();
  const raw = incoming.rawHeaders;
  for (let i = 0; i + 1 < raw.length; i += 2) {
    // HTTP/2 style names never reach an HTTP/1.1 handler.
    if (!raw[i].startsWith(":")) headers.append(raw[i], raw[i + 1]);
  }
  return headers;
}

/** The request as the router takes it. Its address uses the host only to be whole; nothing is decided by it. */
function requestOf(incoming, signal, application) {
  const url = new URL(`http://host.invalid${incoming.url}`);
  const host = incoming.headers.host ?? "";
  if (/^[a-z0-9.-]+(:\d+)?$|^\[[0-9a-f:]+\](:\d+)?$/i.test(host)) url.host = host;
  const init = { method: incoming.method, headers: headersOf(incoming), signal };
  if (!SENDS_NOTHING.has(incoming.method)) {
    const limit = application.bodyLimit(url.pathname);
    init.body = ReadableStream.from(counted(incoming, limit, application.bodyTooLarge));
    init.duplex = "half";
  }
  return new Request(url, init);
}

/**
 * Reads what is left of a body. An answer sent over it would reach the sender only after a reset, if at all.
 */
function drain(incoming) {
  if (incoming.complete || incoming.destroyed) return Promise.resolve();
  return new Promise((resolve) => {
    let bytes = 0;
    const timer = setTimeout(() => incoming.destroy(), DRAIN_MS);
    const done = () => {
      clearTimeout(timer);
      resolve();
    };
    incoming.on("data", (chunk) => {
      bytes += chunk.length;
      taken.set(incoming, (taken.get(incoming) ?? 0) + chunk.length);
      if (bytes > DRAIN_BYTES) incoming.destroy();
    });
    for (const event of ["end", "close", "error"]) incoming.once(event, done);
    // Whoever began to read and left without a word would hold the flow for good.
    incoming.removeAllListeners("readable");
    incoming.resume();
  });
}

function writeHead(response, answer, given, closing) {
  const headers = {};
  given.forEach((value, name) => {
    if (name !== "set-cookie") headers[name] = value;
  });
  const cookies = answer.headers.getSetCookie();
  if (cookies.length > 0) headers["set-cookie"] = cookies;
  if (closing) headers.connection = "close";
  response.writeHead(answer.status, headers);
}

function sendBody(answer, packer, response) {
  if (answer.body === null) {
    response.end();
    return Promise.resolve();
  }
  // Without this the head waits for the first piece of the body, which a stream may send much later.
  response.flushHeaders();
  return new Promise((resolve) => {
    // An error here means that the caller left or the source broke: the connection is cut, so that nobody takes half
    // an answer for a whole one.
    const through = packer === null ? [] : [packer];
    pipeline([Readable.fromWeb(answer.body), ...through, response], () => resolve());
  });
}

/** Tells a sender that was too slow, and ends the connection. */
function cutSlow(incoming, response, headers, words) {
  if (incoming.complete || incoming.destroyed) return;
  const leave = () => incoming.destroy();
  if (response.headersSent) return leave();
  const problem = {
    type: "tag:lowlying.example,2026:slow",
    title: "Sent too slowly",
    status: 408,
    detail: `${words} Nothing was stored; send it again.`,
  };
  response.once("finish", leave);
  response.once("close", leave);
  response
    .writeHead(408, {
      ...headers,
      "content-type": "application/problem+json; charset=utf-8",
      "cache-control": "no-store",
      connection: "close",
    })
    .end(JSON.stringify(problem));
}

/**
 * Cuts senders that hold a connection: small bodies have a time in all, uploads a least number of bytes in each span of
 * time. A span in which the application has not taken what is here already is not the sender's fault.
 */
function watchSender(incoming, response, { application, headers, every }) {
  if (SENDS_NOTHING.has(incoming.method)) return;
  const small = application.bodyLimit(incoming.url.split("?", 1)[0]) !== null;
  const settings = application.env();
  const seconds = small ? settings.SMALL_BODY_SECONDS : settings.SLOW_UPLOAD_SECONDS;
  const least = settings.SLOW_UPLOAD_BYTES;
  let before = 0;
  const look = () => {
    const bytes = taken.get(incoming) ?? 0;
    const came = bytes - before;
    before = bytes;
    if (small) return cutSlow(incoming, response, headers, `The body did not come within ${seconds} s.`);
    if (came >= least || incoming.readableLength > 0) return;
    cutSlow(incoming, response, headers, `Less than ${least} bytes came within ${seconds} s.`);
  };
  const stop = every(seconds * 1000, look);
  for (const event of ["end", "close"]) incoming.once(event, stop);
}

/** Calls again and again until it is stopped; never keeps the process alive. */
function everySpan(ms, run) {
  const timer = setInterval(run, ms).unref();
  return () => clearInterval(timer);
}

const TITLES = {
  400: "The request cannot be read",
  405: "Method not allowed",
  408: "Sent too slowly",
  431: "Too long",
  500: "This did not work",
};

function problemText(status, detail) {
  const type = `tag:lowlying.example,2026:${status === 500 ? "failure" : "invalid"}`;
  return JSON.stringify({ type, title: TITLES[status], status, detail });
}

/** What the router does not answer: words for people, a problem document for programs. */
function plainAnswer(incoming, response, status, text, headers) {
  if (/^\/+api(\/|$)/.test(incoming.url)) {
    const type = { "content-type": "application/problem+json; charset=utf-8", "cache-control": "no-store" };
    response.writeHead(status, { ...headers, ...type }).end(problemText(status, text));
    return;
  }
  response.writeHead(status, { ...headers, "content-type": "text/plain; charset=utf-8" }).end(`${text}\n`);
}

/** What the parser of requests refuses never becomes one: the answer is written by hand, and the connection ends. */
function refuseUnparsed(error, socket, headers) {
  const begun = socket._httpMessage?.headersSent === true;
  if (error.code === "ECONNRESET" || !socket.writable || begun) return void socket.destroy();
  const [status, words] =
    error.code === "HPE_HEADER_OVERFLOW"
      ? [431, "The address and headers of a request may have 16 kB together."]
      : error.code === "ERR_HTTP_REQUEST_TIMEOUT"
        ? [408, "The request did not come in time. Send it again."]
        : error.code === "HPE_INVALID_METHOD"
          ? [400, "This method is not known here."]
          : [400, "This is no request of HTTP/1.1."];
  const body = problemText(status, words);
  const all = {
    ...headers,
    "content-type": "application/problem+json; charset=utf-8",
    "content-length": Buffer.byteLength(body),
    "cache-control": "no-store",
    connection: "close",
  };
  const lines = Object.entries(all).map(([name, value]) => `${name}: ${value}\r\n`);
  socket.end(`HTTP/1.1 ${status} ${TITLES[status]}\r\n${lines.join("")}\r\n${body}`);
}

/** An address that the router could not decode would fail before any middleware runs. */
function isReadable(address) {
  if (!address.startsWith("/")) return false;
  try {
    decodeURI(address.split("?", 1)[0]);
    return true;
  } catch {
    return false;
  }
}

/**
 * Makes the server of the application.
 *
 * @param options.application what the build exports for its surroundings
 * @param options.handle takes a Request and a context, gives a Response
 * @param options.staticFolder built assets, or null where another handler sends them
 * @param options.every looks at senders of bodies after each span of milliseconds, until the function it returns is called
 * @param options.before an optional handler that sees every request first (development)
 */
export function makeServer({ application, handle, staticFolder, before, every = everySpan }) {
  const { log, env } = application;
  const files = staticFolder === null ? new Map() : loadStaticFiles(staticFolder);
  const headers = application.plainHeaders();
  const state = { closing: false, open: 0, idle: null };

  async function answer(incoming, response) {
    if (!METHODS.has(incoming.method)) {
      const allow = { ...headers, allow: [...METHODS].join(", ") };
      return plainAnswer(incoming, response, 405, "This method is not known here.", allow);
    }
    if (!isReadable(incoming.url)) {
      return plainAnswer(incoming, response, 400, "This address cannot be read.", headers);
    }
    if (await sendStatic(files, incoming, response, headers)) return;
    watchSender(incoming, response, { application, headers, every });
    const leaving = new AbortController();
    response.once("close", () => {
      if (!response.writableFinished) leaving.abort();
    });
    const address = application.clientAddress(
      incoming.socket.remoteAddress ?? "unknown",
      incoming.headers["x-forwarded-for"],
      env().TRUST_PROXY,
    );
    const given = await handle(
      requestOf(incoming, leaving.signal, application),
      application.makeContext(address),
    );
    await drain(incoming);
    if (response.destroyed || response.headersSent) return void given.body?.cancel();
    const { headers: head, packer } = packing(incoming, given);
    writeHead(response, given, head, state.closing);
    await sendBody(given, packer, response);
  }

  const server = createServer({ keepAliveTimeout: KEEP_ALIVE_MS }, (incoming, response) => {
    state.open += 1;
    response.once("close", () => {
      state.open -= 1;
      if (state.open === 0) state.idle?.();
    });
    // Errors of a connection that was cut come here too; there is nobody left to tell.
    incoming.on("error", () => {});
    const run = () =>
      answer(incoming, response).catch((error) => {
        log.error({ err: error }, "request failed outside the application");
        if (response.headersSent) response.destroy();
        else plainAnswer(incoming, response, 500, "Something went wrong on the server. Try again.", headers);
      });
    if (before) before(incoming, response, run);
    else run();
  });
  server.on("clientError", (error, socket) => refuseUnparsed(error, socket, headers));
  server.headersTimeout = HEADERS_MS;
  server.requestTimeout = REQUEST_MS;

  return {
    server,
    openRequests: () => state.open,
    listen(port, host) {
      return new Promise((resolve, reject) => {
        server.once("error", reject);
        server.listen(port, host, () => {
          server.off("error", reject);
          resolve();
        });
      });
    },
    /** Takes no further connection, finishes the requests that are open, for at most `patienceMs`. */
    async close(patienceMs) {
      state.closing = true;
      server.close();
      server.closeIdleConnections();
      let timer;
      const late = new Promise((resolve) => {
        timer = setTimeout(resolve, patienceMs);
      });
      const quiet = new Promise((resolve) => {
        state.idle = resolve;
        if (state.open === 0) resolve();
      });
      await Promise.race([quiet, late]);
      clearTimeout(timer);
      server.closeAllConnections();
    },
  };
}
