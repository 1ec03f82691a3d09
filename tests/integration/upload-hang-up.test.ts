import { once } from "node:events";
import { type AddressInfo, connect } from "node:net";
import { isNotNull } from "drizzle-orm";
import { afterAll, beforeAll, expect, it, vi } from "vitest";
import { application } from "~/application.server";
import { db } from "~/db/client.server";
import { ensembles, sources } from "~/db/schema.server";
import { sweepUploads } from "~/services/ensembles/sweep-uploads.server";
import { makeServer } from "../../scripts/lib/serve.mjs";
import { storedRows } from "../factories/stored";
import { BUTANE, frame, makeLab } from "../factories/upload";
import { call } from "../setup/app";

/** The real server around the application, on a port of its own. */
const serving = makeServer({
  application,
  staticFolder: null,
  handle: (request: Request) => {
    const { pathname, search } = new URL(request.url);
    const { method, headers, body, signal } = request;
    return call(pathname + search, { method, headers, body, signal });
  },
});
let token: string;
let port: number;
beforeAll(async () => {
  await serving.listen(0, "127.0.0.1");
  port = (serving.server.address() as AddressInfo).port;
  ({ token } = await makeLab());
});
afterAll(() => serving.close(1_000));

/** Sends the head of a form with a file and the first frames of it, and leaves the rest unsent. */
async function beginUpload(frames: number) {
  const socket = connect(port, "127.0.0.1");
  socket.on("error", () => {});
  await once(socket, "connect");
  const head = [
    "POST /api/v1/ensembles HTTP/1.1",
    "Host: 127.0.0.1",
    `Authorization: Bearer ${token}`,
    "Content-Type: multipart/form-data; boundary=b",
    "Content-Length: 50000000",
    "",
    "--b",
    'Content-Disposition: form-data; name="file"; filename="long.xyz"',
    "",
    "",
  ].join("\r\n");
  socket.write(head);
  socket.write(Array.from({ length: frames }, (_, k) => frame(`c_${k} energy=-${k}.5`)).join(""));
  return socket;
}

it("leaves nothing behind when the sender hangs up in the middle, and shows nothing before (F04)", async () => {
  const before = await storedRows();
  const socket = await beginUpload(6_000);
  // Rows are on their way: the upload is under way, and nobody sees it.
  await vi.waitFor(
    async () => expect((await storedRows()).frames).toBeGreaterThan(before.frames ?? 0),
    20_000,
  );
  const listed = await (await call("/api/v1/ensembles", { token })).json();
  expect(listed.total).toBe(0);
  socket.destroy();
  await vi.waitFor(async () => expect(await storedRows()).toEqual(before), 20_000);
});

it("sweeps what a killed process left, and spares what is under way (F03)", async () => {
  const before = await storedRows();
  const socket = await beginUpload(6_000);
  await vi.waitFor(
    async () => expect((await storedRows()).frames).toBeGreaterThan(before.frames ?? 0),
    20_000,
  );
  await sweepUploads();
  expect((await storedRows()).ensembles).toBe((before.ensembles ?? 0) + 1);
  // As if the process had been killed: its rows are there and nothing moves them on.
  const later = new Date(Date.now() + 2 * 3_600_000);
  await sweepUploads(later);
  expect(await db.select().from(ensembles).where(isNotNull(ensembles.readingSince))).toEqual([]);
  expect(await db.select().from(sources)).toEqual([]);
  socket.destroy();
  await vi.waitFor(async () => expect(await storedRows()).toEqual(before), 20_000);
});

it("answers a refusal after the whole body, so that the sender hears it", async () => {
  const form = new FormData();
  form.append("file", new Blob([frame("x", BUTANE).repeat(40_000)]), "long.xyz");
  form.append("unknown", "field");
  const send = (secret: string, path = "/api/v1/ensembles") =>
    fetch(`http://127.0.0.1:${port}${path}`, {
      method: "POST",
      body: form,
      headers: { authorization: `Bearer ${secret}` },
    });
  expect((await send("wrong")).status).toBe(401);
  expect((await send(token, "/api/v1/nothing")).status).toBe(404);
  const refused = await send(token);
  expect(refused.status).toBe(422);
  expect((await refused.json()).errors).toMatchObject([{ field: "unknown" }]);
}, 60_000);
