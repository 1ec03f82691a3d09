import { randomBytes } from "node:crypto";
import { gzipSync } from "node:zlib";
import { afterEach, beforeAll, describe, expect, it } from "vitest";
import { withEnv } from "../factories/environment";
import { storedRows } from "../factories/stored";
import { BUTANE, frame, makeLab, upload } from "../factories/upload";
import { call } from "../setup/app";

let token: string;
let teamToken: string;
beforeAll(async () => {
  ({ token } = await makeLab());
  ({ token: teamToken } = await makeLab());
});

const fields = { level: "A method", energyUnit: "kcal/mol" };
const good = frame("energy=-1.5") + frame("energy=-1.4");

let before: Record<string, number>;
beforeAll(async () => {
  before = await storedRows();
});
afterEach(async () => {
  expect(await storedRows(), "nothing is half stored").toEqual(before);
});

/** The refusal as a problem document. */
async function refusal(
  content: string | Uint8Array,
  more: Record<string, string> = fields,
  name = "run.xyz",
): Promise<{ status: number; detail: string; errors: { file?: string; line?: number; frame?: number }[] }> {
  const response = await upload(token, [{ name, content }], more);
  expect(response.headers.get("content-type")).toContain("application/problem+json");
  const body = await response.json();
  expect(body).toMatchObject({ status: response.status });
  expect(body.detail.length).toBeGreaterThan(20);
  return body;
}

describe("files that cannot be taken in", () => {
  it.each([
    ["an empty file", "", /no frames/],
    ["a blank file", "\n\n  \n", /no frames/],
    ["random bytes", randomBytes(5_000), /not a text file/],
    ["a PDF", "%PDF-1.7\n1 0 obj\n", /PDF/],
    ["a spreadsheet", Buffer.from("PK\x03\x04\x14\0\x06\0\x08\0[Content_Types].xml"), /spreadsheet/],
    ["a zip archive", Buffer.from("PK\x03\x04\x14\0\0\0\x08\0run.xyz"), /zip/],
    ["atoms without a header", BUTANE.join("\n"), /atom count/],
    [
      "an SDF without atoms",
      "\n  test\n\n  1  0  0  0  0  0  0  0  0  0999 V2000\nM  END\n$$$$\n",
      /ends with 0 of its 1 atoms/,
    ],
    ["a table", "frame,energy\n1,-1.5\n2,-1.4\n3,-1.3\n", /XYZ or SDF, plain or gzip/],
    ["NUL bytes", `${good}\0\0`, /not a text file/],
    ["a line over 1 MiB", `2\n${"x".repeat(1_100_000)}\nH 0 0 0\nH 0 0 0.74\n`, /1 MiB/],
    ["more atoms than the limit", `1001\n\n${"He 0 0 0\n".repeat(1001)}`, /1,000 atoms/],
    ["a damaged gzip file", gzipSync(good).fill(0xff, 20, 40), /damaged/],
    ["a gzip file that ends early", gzipSync(good).subarray(0, -20), /ends early/],
    [
      "a gzip file with a wrong checksum",
      Buffer.concat([gzipSync(good).subarray(0, -8), Buffer.alloc(8)]),
      /checksum/,
    ],
    ["a gzip file inside a gzip file", gzipSync(gzipSync(good)), /packed twice/],
  ])("%s", async (_, content, words) => {
    const body = await refusal(content);
    expect(body.status).toBe(422);
    expect(body.detail).toMatch(words);
    expect(body.errors[0]?.file).toBe("run.xyz");
  });

  it("none of whose frames can be used: each is named with its line", async () => {
    const nan = frame("energy=-1", [...BUTANE.slice(0, 13), "H nan 0 0"]);
    const short = frame("energy=-1", BUTANE.slice(0, 13)).replace("13\n", "14\n");
    const body = await refusal(nan + short);
    expect(body.status).toBe(422);
    expect(body.errors).toMatchObject([
      { file: "run.xyz", frame: 1, line: 16 },
      { file: "run.xyz", frame: 2 },
    ]);
  });

  it("the second of several: the whole upload is refused, and the file is named", async () => {
    const response = await upload(
      token,
      [
        { name: "good.xyz", content: good },
        { name: "bad.xyz", content: "not a structure" },
      ],
      fields,
    );
    expect(response.status).toBe(422);
    expect((await response.json()).errors).toMatchObject([{ file: "bad.xyz", line: 1 }]);
  });

  it("51,000 frames: stopped at the limit, with the frame named", async () => {
    const water = frame("energy=-76.0", ["O 0 0 0.117", "H 0 0.757 -0.471", "H 0 -0.757 -0.471"]);
    const body = await refusal(water.repeat(51_000));
    expect(body.status).toBe(422);
    expect(body.detail).toContain("50,000 frames");
    expect(body.errors).toMatchObject([{ file: "run.xyz", frame: 50_001, line: 250_001 }]);
  });
});

describe("the limit of bytes", () => {
  it("is met by what comes out of gzip", async () => {
    withEnv({ MAX_FILE_BYTES: 2 ** 20 });
    const bomb = gzipSync(good.repeat(10_000));
    expect(bomb.length).toBeLessThan(2 ** 20 / 8);
    const body = await refusal(bomb, fields, "bomb.xyz.gz");
    expect(body.status).toBe(413);
    expect(body.detail).toMatch(/1\.0.MB/);
  });

  it.each([
    ["zeros", "\0"],
    ["blank lines", "\n"],
    ["lines that could begin a frame", "900\n"],
    ["another format", "HEADER    A PROTEIN\n"],
  ])("is what a bomb of %s is told, and one byte less is not", async (_, piece) => {
    const bytes = Buffer.alloc(24e6, piece);
    withEnv({ MAX_FILE_BYTES: bytes.length - 1 });
    const large = await refusal(gzipSync(bytes), fields, "bomb.xyz.gz");
    expect(large.status).toBe(413);
    expect(large.errors).toMatchObject([{ file: "bomb.xyz.gz" }]);
    withEnv({ MAX_FILE_BYTES: bytes.length });
    expect((await refusal(gzipSync(bytes), fields, "bomb.xyz.gz")).status).toBe(422);
  });

  it.each([
    ["blank lines", "\n"],
    ["short lines", "x\n"],
    ["lines that could begin a frame", "900\n"],
  ])("is not needed to stop a bomb of %s", async (_, piece) => {
    const bomb = gzipSync(Buffer.concat([Buffer.from(good), Buffer.alloc(200e6, piece)]));
    const body = await refusal(bomb, fields, "bomb.xyz.gz");
    expect(body.status).toBe(422);
    expect(body.detail).toContain("holds no frame");
  });

  it("refuses one byte more", async () => {
    withEnv({ MAX_FILE_BYTES: good.length - 1 });
    expect((await refusal(good)).status).toBe(413);
  });

  it("counts for the team: a full team takes nothing more in", async () => {
    withEnv({ TEAM_QUOTA_BYTES: 10 });
    const response = await upload(teamToken, [{ name: "a.xyz", content: good }], fields);
    expect(response.status).toBe(413);
    expect((await response.json()).detail).toContain("team");
  });

  it("of frames and atoms can be set", async () => {
    withEnv({ MAX_FRAMES: 1 });
    expect((await refusal(good)).errors).toMatchObject([{ frame: 2 }]);
    withEnv({ MAX_ATOMS: 13 });
    expect((await refusal(good)).errors).toMatchObject([{ frame: 1 }]);
  });
});

describe("energies that are not clear", () => {
  it("without a unit", async () => {
    const body = await refusal(good, { level: "A" });
    expect(body.status).toBe(422);
    expect(body.errors).toMatchObject([{ field: "energyUnit" }]);
  });

  it("without a level", async () => {
    const body = await refusal(good, { energyUnit: "kcal/mol" });
    expect(body.errors).toMatchObject([{ field: "level" }]);
  });

  it("in a number that no frame has", async () => {
    for (const energyFrom of ["key:Energy", "number:2", "field:E"]) {
      const body = await refusal(good, { ...fields, energyFrom });
      expect(body.status).toBe(422);
      expect(body.errors).toMatchObject([{ field: "energyFrom" }]);
    }
  });
});

describe("requests that are not right", () => {
  const send = (form: FormData) => call("/api/v1/ensembles", { method: "POST", token, body: form });

  it.each([
    [{ units: "kcal/mol" }, "units"],
    [{ role: "owner" }, "role"],
    [{ team: "aaaaaaaaaaaaaaaa" }, "team"],
    [{ energyUnit: "furlong" }, "energyUnit"],
    [{ energyFrom: "energy" }, "energyFrom"],
    [{ energyKind: "loud" }, "energyKind"],
    [{ energyTemperature: "warm" }, "energyTemperature"],
    [{ energyTemperature: "-5" }, "energyTemperature"],
    [{ name: "n".repeat(201) }, "name"],
    [{ name: "n".repeat(5_000) }, "name"],
  ])("%j", async (more, field) => {
    const body = await refusal(good, { ...fields, ...(more as Record<string, string>) });
    expect(body.status).toBe(422);
    expect(body.errors).toMatchObject([{ field }]);
  });

  it("a field that stands twice, a file in another field, no file at all", async () => {
    const twice = new FormData();
    twice.append("level", "A");
    twice.append("level", "B");
    twice.append("file", new Blob([good]), "a.xyz");
    const elsewhere = new FormData();
    elsewhere.append("upload", new Blob([good]), "a.xyz");
    const none = new FormData();
    none.append("level", "A");
    for (const [form, field] of [
      [twice, "level"],
      [elsewhere, "upload"],
      [none, "file"],
    ] as const) {
      const response = await send(form);
      expect(response.status).toBe(422);
      expect((await response.json()).errors).toMatchObject([{ field }]);
    }
  });

  it("another content type is 415, a broken form 400", async () => {
    const as = (type: string, body: string) =>
      call("/api/v1/ensembles", { method: "POST", token, body, headers: { "content-type": type } });
    expect((await as("application/json", "{}")).status).toBe(415);
    expect((await as("text/plain", good)).status).toBe(415);
    expect((await as("multipart/form-data", "x")).status).toBe(400);
    expect((await as("multipart/form-data; boundary=b", "no boundary here")).status).toBe(400);
    const cut = `--b\r\nContent-Disposition: form-data; name="file"; filename="a.xyz"\r\n\r\n${good}`;
    const broken = await as("multipart/form-data; boundary=b", cut);
    expect(broken.status).toBe(400);
    expect((await broken.json()).detail).toContain("ended before its end");
  });
});
