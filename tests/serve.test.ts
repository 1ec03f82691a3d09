import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { Agent, request as httpRequest, type IncomingMessage } from "node:http";
import { type AddressInfo, connect } from "node:net";
import os from "node:os";
import path from "node:path";
import { gunzipSync } from "node:zlib";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { makeServer } from "../scripts/lib/serve.mjs";

/** Stands in for the router: what it is asked is kept, what it answers is set by each test. */
type Handle = (request: Request, context: { address: string }) => Promise<Response>;

let folder = "";
let frame: ReturnType<typeof makeServer>;
let base = "";
let port = 0;
let handle: Handle;
let trusted = 0;
/** Looks at senders, which the server would take after each span of time. */
let looks: { ms: number; run: () => void }[] = [];

beforeEach(async () => {
  folder = mkdtempSync(path.join(os.tmpdir(), "lowlying-serve-"));
  mkdirSync(path.join(folder, "assets"));
  writeFileSync(path.join(folder, "assets/app-a1b2.js"), "export const a = 1;\n".repeat(200));
  writeFileSync(path.join(folder, "favicon.svg"), "<svg/>");
  trusted = 0;
  handle = async () => new Response("answered");
  const application = {
    bodyLimit: (pathname: string) => (pathname === "/upload" ? null : 1000),
    bodyTooLarge: (limit: number) => new RangeError(`over ${limit}`),
    clientAddress: (peer: string, forwarded: string | undefined, hops: number) =>
      hops > 0 ? (forwarded ?? peer) : peer,
    makeContext: (address: string) => ({ address }),
    plainHeaders: () => ({ "x-content-type-options": "nosniff" }),
    env: () => ({
      TRUST_PROXY: trusted,
      SMALL_BODY_SECONDS: 30,
      SLOW_UPLOAD_SECONDS: 60,
      SLOW_UPLOAD_BYTES: 1000,
    }),
    log: { error: () => {} },
  };
  frame = makeServer({
    application,
    handle: (request: Request, context: { address: string }) => handle(request, context),
    staticFolder: folder,
    every: (ms: number, run: () => void) => {
      const look = { ms, run };
      looks.push(look);
      return () => {
        looks = looks.filter((one) => one !== look);
      };
    },
  });
  looks = [];
  await frame.listen(0, "127.0.0.1");
  port = (frame.server.address() as AddressInfo).port;
  base = `http://127.0.0.1:${port}`;
});

afterEach(async () => {
  await frame.close(0);
  rmSync(folder, { recursive: true, force: true });
});

describe("built assets", () => {
  it("carry our headers and may be kept for good", async () => {
    const answer = await fetch(`${base}/assets/app-a1b2.js`);
    expect(answer.status).toBe(200);
    expect(answer.headers.get("content-type")).toBe("text/javascript; charset=utf-8");
    expect(answer.headers.get("cache-control")).toBe("public, max-age=31536000, immutable");
    expect(answer.headers.get("x-content-type-options")).toBe("nosniff");
    const tag = answer.headers.get("etag") ?? "";
    const again = await fetch(`${base}/assets/app-a1b2.js`, { headers: { "if-none-match": tag } });
    expect(again.status).toBe(304);
  });

  it("are packed for those who unpack", async () => {
    const raw = await new Promise<IncomingMessage & { body?: Buffer }>((resolve) => {
      const sent = httpRequest(`${base}/assets/app-a1b2.js`, { headers: { "accept-encoding": "gzip" } });
      sent.on("response", (response: IncomingMessage & { body?: Buffer }) => {
        const chunks: Buffer[] = [];
        response.on("data", (chunk: Buffer) => chunks.push(chunk));
        response.on("end", () => {
          response.body = Buffer.concat(chunks);
          resolve(response);
        });
      });
      sent.end();
    });
    expect(raw.headers["content-encoding"]).toBe("gzip");
    expect(raw.body?.length).toBeLessThan(400);
    expect(gunzipSync(raw.body ?? Buffer.alloc(0)).toString()).toContain("export const a = 1;");
  });

  it("end where the folder ends", async () => {
    writeFileSync(`${folder}-secret`, "secret");
    handle = async () => new Response("no file", { status: 404 });
    const name = path.basename(`${folder}-secret`);
    for (const address of [
      `/../${name}`,
      `/assets/../../${name}`,
      `/%2e%2e/${name}`,
      `/assets/..%2f..%2f${name}`,
      "//favicon.svg",
    ]) {
      const text = await new Promise<string>((resolve) => {
        const socket = connect(port, "127.0.0.1", () =>
          socket.write(`GET ${address} HTTP/1.1\r\nHost: x\r\nConnection: close\r\n\r\n`),
        );
        let all = "";
        socket.on("data", (chunk) => {
          all += chunk.toString();
        });
        socket.on("close", () => resolve(all));
      });
      expect(text, address).toMatch(/^HTTP\/1\.1 404/);
      expect(text).not.toContain("\r\n\r\nsecret");
    }
    rmSync(`${folder}-secret`);
  });

  it("leave everything else to the application", async () => {
    expect(await (await fetch(`${base}/assets/app-a1b2.js`, { method: "POST", body: "x" })).text()).toBe(
      "answered",
    );
    expect(await (await fetch(`${base}/`)).text()).toBe("answered");
  });
});

/** The answer as it came over the line, not unpacked. */
function raw(
  headers: Record<string, string>,
  method = "GET",
): Promise<{ headers: IncomingMessage["headers"]; body: Buffer }> {
  return new Promise((resolve) => {
    const sent = httpRequest(base, { headers, method });
    sent.on("response", (response) => {
      const chunks: Buffer[] = [];
      response.on("data", (chunk: Buffer) => chunks.push(chunk));
      response.on("end", () => resolve({ headers: response.headers, body: Buffer.concat(chunks) }));
    });
    sent.end();
  });
}

describe("answers of the application", () => {
  const text = "<p>One of many lines.</p>\n".repeat(500);
  const page = (headers: Record<string, string> = {}) => {
    handle = async () => new Response(text, { headers: { "content-type": "text/html", ...headers } });
  };

  it("are packed for those who unpack, and say what they hang on", async () => {
    page({ vary: "Cookie" });
    const packed = await raw({ "accept-encoding": "br, gzip;q=0.5" });
    expect(packed.headers["content-encoding"]).toBe("gzip");
    expect(packed.headers.vary).toBe("Cookie, Accept-Encoding");
    expect(packed.body.length).toBeLessThan(text.length / 20);
    expect(gunzipSync(packed.body).toString()).toBe(text);
    const others: Record<string, string>[] = [
      {},
      { "accept-encoding": "identity" },
      { "accept-encoding": "gzip;q=0, br" },
    ];
    for (const headers of others) {
      const plain = await raw(headers);
      expect(plain.headers["content-encoding"]).toBe(undefined);
      expect(plain.headers.vary).toBe("Cookie, Accept-Encoding");
      expect(plain.body.toString()).toBe(text);
    }
  });

  it("go as they are where they are packed, short, tagged, asked to stay so, or no text", async () => {
    const asks = { "accept-encoding": "gzip" };
    const untouched: Record<string, string>[] = [
      { "content-encoding": "br" },
      { "content-length": String(text.length), "content-type": "application/octet-stream" },
      { etag: '"a"' },
      { "cache-control": "private, no-transform" },
      { "content-type": "application/zip" },
    ];
    for (const headers of untouched) {
      page(headers);
      const answer = await raw(asks);
      expect(answer.body.toString(), JSON.stringify(headers)).toBe(text);
    }
    handle = async () => Response.json({ a: 1 }, { headers: { "content-length": "7" } });
    const short = await raw(asks);
    expect(short.headers["content-encoding"]).toBe(undefined);
    expect(short.headers.vary).toBe("Accept-Encoding");
  });

  it("of every text travel so: JSON, problems, tables, structures", async () => {
    for (const type of [
      "application/json",
      "application/problem+json",
      "text/csv; charset=utf-8",
      "chemical/x-xyz",
    ]) {
      page({ "content-type": type });
      expect((await raw({ "accept-encoding": "gzip" })).headers["content-encoding"], type).toBe("gzip");
    }
  });

  it("come piece by piece, packed or not", async () => {
    let more: () => void = () => {};
    const waits = new Promise<void>((resolve) => {
      more = resolve;
    });
    handle = async () =>
      new Response(
        new ReadableStream({
          async start(control) {
            control.enqueue(new TextEncoder().encode("first "));
            await waits;
            control.enqueue(new TextEncoder().encode("second"));
            control.close();
          },
        }),
        { headers: { "content-type": "text/html" } },
      );
    const reader = (await fetch(base, { headers: { "accept-encoding": "gzip" } })).body?.getReader();
    const first = await reader?.read();
    expect(new TextDecoder().decode(first?.value)).toBe("first ");
    more();
    expect(new TextDecoder().decode((await reader?.read())?.value)).toBe("second");
  });

  it("to a HEAD carry no body and no encoding", async () => {
    handle = async () => new Response(null, { headers: { "content-type": "text/html" } });
    const answer = await raw({ "accept-encoding": "gzip" }, "HEAD");
    expect([answer.headers["content-encoding"], answer.body.length]).toEqual([undefined, 0]);
  });
});

describe("requests", () => {
  it("come to the application as they were sent", async () => {
    let seen: { method: string; url: string; body: string; header: string | null } | undefined;
    handle = async (request) => {
      const { method, url, headers } = request;
      seen = { method, url, body: await request.text(), header: headers.get("x-a") };
      const answer = new Response(null, { status: 201 });
      answer.headers.append("set-cookie", "a=1");
      answer.headers.append("set-cookie", "b=2");
      return answer;
    };
    const answer = await fetch(`${base}/p/q?r=s%20t`, {
      method: "PUT",
      body: "héllo",
      headers: { "x-a": "b" },
    });
    expect(seen).toEqual({ method: "PUT", url: `${base}/p/q?r=s%20t`, body: "héllo", header: "b" });
    expect(answer.status).toBe(201);
    expect(answer.headers.getSetCookie()).toEqual(["a=1", "b=2"]);
  });

  it("name the caller by the peer, or by the proxy in front where one is trusted (security G07)", async () => {
    handle = async (_request, context) => new Response(context.address);
    const ask = async () => (await fetch(base, { headers: { "x-forwarded-for": "192.0.2.9" } })).text();
    expect(await ask()).toBe("127.0.0.1");
    trusted = 1;
    expect(await ask()).toBe("192.0.2.9");
  });

  it("with an address that cannot be read are answered with our headers", async () => {
    const answer = await fetch(`${base}/%E0%A4%A`);
    expect(answer.status).toBe(400);
    expect(answer.headers.get("x-content-type-options")).toBe("nosniff");
  });

  it("that the router never sees are problem documents for programs, with what is allowed", async () => {
    const told = (head: string) =>
      new Promise<string>((resolve) => {
        const socket = connect(port, "127.0.0.1", () => socket.write(head));
        let text = "";
        socket.on("data", (data) => {
          text += data.toString();
        });
        socket.on("close", () => resolve(text));
      });
    const unreadable = await fetch(`${base}/api/v1/ensembles/%ff`);
    expect(unreadable.status).toBe(400);
    expect(unreadable.headers.get("content-type")).toContain("application/problem+json");
    expect(await unreadable.json()).toMatchObject({ status: 400, detail: "This address cannot be read." });
    const end = "Host: a\r\nConnection: close\r\n\r\n";
    const trace = await told(`TRACE /api/v1/ensembles HTTP/1.1\r\n${end}`);
    expect(trace).toMatch(
      /^HTTP\/1\.1 405 [\s\S]*allow: GET, HEAD, POST[\s\S]*problem\+json[\s\S]*"status":405/i,
    );
    expect(await told(`BREW /api/v1 HTTP/1.1\r\n${end}`)).toMatch(/^HTTP\/1\.1 400 [\s\S]*"status":400/);
    const long = await told(`GET /api/v1/${"a".repeat(20_000)} HTTP/1.1\r\n${end}`);
    expect(long).toMatch(/^HTTP\/1\.1 431 [\s\S]*nosniff[\s\S]*problem\+json[\s\S]*16 kB/);
  });

  it("end in a plain 500 where the application breaks", async () => {
    handle = async () => {
      throw new Error("MARKER");
    };
    const answer = await fetch(base);
    expect(answer.status).toBe(500);
    expect(await answer.text()).not.toContain("MARKER");
  });

  it("tell the application when their caller leaves", async () => {
    const gone = new Promise<void>((resolve) => {
      handle = (request) =>
        new Promise((answer) => {
          request.signal.addEventListener("abort", () => {
            resolve();
            answer(new Response("nobody reads this"));
          });
          socket.destroy();
        });
    });
    const socket = connect(port, "127.0.0.1", () => socket.write("GET / HTTP/1.1\r\nHost: x\r\n\r\n"));
    await gone;
  });
});

/** Sends a body in pieces over one socket; `next` sends the rest. */
function slowPost(pathname: string, length: number) {
  const socket = connect(port, "127.0.0.1");
  let all = "";
  socket.on("data", (chunk) => {
    all += chunk.toString();
  });
  socket.on("error", () => {});
  const closed = new Promise<string>((resolve) => socket.on("close", () => resolve(all)));
  socket.write(`POST ${pathname} HTTP/1.1\r\nHost: x\r\nContent-Length: ${length}\r\n\r\n`);
  return { socket, closed, text: () => all };
}

describe("bodies", () => {
  it("are read to their end before a refusal is sent", async () => {
    handle = async () => new Response("refused", { status: 403 });
    const body = Buffer.alloc(20_000_000);
    for (const pathname of ["/upload", "/small"]) {
      const answer = await fetch(base + pathname, { method: "POST", body });
      expect([answer.status, await answer.text()]).toEqual([403, "refused"]);
    }
  });

  it("are read to their end where the application leaves in the middle", async () => {
    handle = async (request) => {
      const reader = request.body?.getReader();
      await reader?.read();
      await reader?.cancel();
      return new Response("enough", { status: 413 });
    };
    const answer = await fetch(`${base}/upload`, { method: "POST", body: Buffer.alloc(20_000_000) });
    expect([answer.status, await answer.text()]).toEqual([413, "enough"]);
  });

  it("are read to their end where somebody took hold of them and forgot them", async () => {
    const forgotten: Request[] = [];
    handle = async (request) => {
      // A copy begins to read at once.
      forgotten.push(new Request(request, { headers: {} }));
      return new Response("refused", { status: 403 });
    };
    for (const [pathname, bytes] of [
      ["/small", 3],
      ["/upload", 5_000_000],
    ] as const) {
      const answer = await fetch(base + pathname, { method: "POST", body: Buffer.alloc(bytes) });
      expect([answer.status, await answer.text()]).toEqual([403, "refused"]);
    }
    expect(forgotten).toHaveLength(2);
  });

  it("of small calls stop at their limit, those of uploads do not", async () => {
    handle = async (request) => {
      try {
        return new Response(String((await request.arrayBuffer()).byteLength));
      } catch (error) {
        return new Response((error as Error).message, { status: 413 });
      }
    };
    const post = async (pathname: string, bytes: number) => {
      const answer = await fetch(base + pathname, { method: "POST", body: Buffer.alloc(bytes) });
      return `${answer.status} ${await answer.text()}`;
    };
    expect(await post("/small", 1000)).toBe("200 1000");
    expect(await post("/small", 1001)).toBe("413 over 1000");
    expect(await post("/small", 5_000_000)).toBe("413 over 1000");
    expect(await post("/upload", 5_000_000)).toBe("200 5000000");
  });
});

describe("slow senders", () => {
  /** Waits for what the server does by itself, without a clock. */
  const until = (done: () => boolean) =>
    new Promise<void>((resolve) => {
      const look = () => (done() ? resolve() : setImmediate(look));
      look();
    });
  /** An application that reads the body and says when a piece came. */
  const reading = () => {
    const state = { bytes: 0, failed: false };
    handle = async (request) => {
      try {
        for await (const chunk of request.body ?? []) state.bytes += chunk.length;
      } catch {
        state.failed = true;
      }
      return new Response("read");
    };
    return state;
  };

  it("of files are cut after a span without enough bytes, and told (security E03)", async () => {
    const seen = reading();
    const slow = slowPost("/upload", 100_000);
    slow.socket.write("x");
    await until(() => seen.bytes === 1);
    expect(looks.map(({ ms }) => ms)).toEqual([60_000]);
    looks[0]?.run();
    const text = await slow.closed;
    expect(text).toMatch(/^HTTP\/1\.1 408/);
    expect(text).toContain("application/problem+json");
    expect(text).toContain("Less than 1000 bytes came within 60 s.");
    expect(text).toContain("x-content-type-options: nosniff");
    await until(() => seen.failed);
    expect(looks).toEqual([]);
  });

  it("of files go on while enough comes", async () => {
    const seen = reading();
    const open = slowPost("/upload", 3_000);
    for (let sent = 1_000; sent <= 2_000; sent += 1_000) {
      open.socket.write("y".repeat(1_000));
      await until(() => seen.bytes === sent);
      looks[0]?.run();
    }
    open.socket.write("y".repeat(1_000));
    await until(() => open.text().includes("read"));
    expect(open.text()).toMatch(/^HTTP\/1\.1 200/);
    expect(looks).toEqual([]);
    open.socket.destroy();
  });

  it("are not blamed while the application is the one that waits", async () => {
    let go: () => void = () => {};
    const gate = new Promise<void>((resolve) => {
      go = resolve;
    });
    let begun = false;
    handle = async (request) => {
      begun = true;
      await gate;
      return new Response(`read ${(await request.text()).length}`);
    };
    const open = slowPost("/upload", 300_000);
    open.socket.write("z".repeat(200_000));
    await until(() => begun && looks.length === 1 && open.socket.bytesWritten > 150_000);
    const [look] = looks;
    for (let k = 0; k < 5; k++) {
      look?.run();
      await new Promise((resolve) => setImmediate(resolve));
    }
    go();
    open.socket.write("z".repeat(100_000));
    await until(() => open.text().includes("read"));
    expect(open.text()).toContain("read 300000");
    open.socket.destroy();
  });

  it("of small bodies have a time in all (security E03)", async () => {
    const seen = reading();
    const slow = slowPost("/small", 900);
    slow.socket.write("x".repeat(800));
    await until(() => seen.bytes === 800);
    expect(looks.map(({ ms }) => ms)).toEqual([30_000]);
    looks[0]?.run();
    const text = await slow.closed;
    expect(text).toMatch(/^HTTP\/1\.1 408/);
    expect(text).toContain("did not come within 30 s");
  });

  it("do not stand in the way of others (security E03)", async () => {
    reading();
    const slow = Array.from({ length: 60 }, () => slowPost("/upload", 100_000));
    for (const { socket } of slow) socket.write("x");
    await until(() => looks.length === slow.length);
    const answer = await fetch(`${base}/upload`, { method: "POST", body: "quick" });
    expect([answer.status, await answer.text()]).toEqual([200, "read"]);
    for (const { socket } of slow) socket.destroy();
    await Promise.all(slow.map(({ closed }) => closed));
  });
});

describe("the shutdown", () => {
  it("finishes a request that is open, and takes no further", async () => {
    let began: () => void = () => {};
    const reading = new Promise<void>((resolve) => {
      began = resolve;
    });
    handle = async (request) => {
      began();
      return new Response(`got ${(await request.text()).length}`);
    };
    const open = slowPost("/small", 10);
    open.socket.write("12345");
    await reading;
    const closing = frame.close(10_000);
    await expect(fetch(base)).rejects.toThrow();
    open.socket.write("67890");
    await closing;
    const text = await open.closed;
    expect(text).toContain("got 10");
    expect(text.toLowerCase()).toContain("connection: close");
  });

  it("finishes an answer that is being streamed", async () => {
    let push: (text: string | null) => void = () => {};
    handle = async () =>
      new Response(
        new ReadableStream({
          start(controller) {
            push = (text) =>
              text === null ? controller.close() : controller.enqueue(new TextEncoder().encode(text));
          },
        }),
      );
    const answer = await fetch(base);
    push("one ");
    const closing = frame.close(10_000);
    push("two");
    push(null);
    expect(await answer.text()).toBe("one two");
    await closing;
  });

  it("does not wait for connections that only idle", async () => {
    const agent = new Agent({ keepAlive: true });
    await new Promise<void>((resolve) => {
      httpRequest(base, { agent }, (response) => response.resume().on("end", resolve)).end();
    });
    await frame.close(60_000);
    agent.destroy();
  });

  it("cuts what does not end in time", async () => {
    handle = () => new Promise(() => {});
    const open = slowPost("/small", 0);
    await new Promise<void>((resolve) => {
      const look = () => (frame.openRequests() > 0 ? resolve() : setImmediate(look));
      look();
    });
    await frame.close(1);
    expect(await open.closed).toBe("");
  });
});
