import { gzipSync } from "node:zlib";
import { beforeAll, describe, expect, it } from "vitest";
import { withEnv } from "../factories/environment";
import { record } from "../factories/mol";
import { storedRows } from "../factories/stored";
import { BUTANE, frame, makeLab, post, takenIn, upload } from "../factories/upload";
import { zipOf } from "../factories/zip";
import { call } from "../setup/app";

let lab: Awaited<ReturnType<typeof makeLab>>;
let token: string;
beforeAll(async () => {
  lab = await makeLab();
  ({ token } = lab);
});

const fields = { level: "A", energyUnit: "kcal/mol" };
const butane = (comment: string) => frame(comment);

describe("G09, a zip archive", () => {
  it("is read entry by entry, each as a file of its own, paths left out", async () => {
    const content = zipOf([
      { name: "runs/", content: "", store: true },
      { name: "runs/night/../one.xyz", content: butane("energy=-1.5") + butane("energy=-1.4") },
      { name: "two.xyz", content: butane("energy=-1.3"), store: true },
      { name: "__MACOSX/._two.xyz", content: "\0\0" },
    ]);
    const taken = await takenIn(
      token,
      [
        { name: "runs.zip", content },
        { name: "last.xyz", content: butane("energy=-1.2") },
      ],
      fields,
    );
    expect(taken.name).toBe("runs");
    expect(taken.intake).toMatchObject({ frames: 4, accepted: 4 });
    expect(taken.files.map(({ name, frames }) => [name, frames])).toEqual([
      ["one.xyz", 2],
      ["two.xyz", 1],
      ["last.xyz", 1],
    ]);
    expect(taken.files[0]?.sha256).toBe(taken.files[1]?.sha256);
    expect(taken.files[0]?.bytes).toBe(content.length);
    // The original archive comes back byte for byte.
    const source = await call(`/files/ensembles/${taken.id}/sources/1`, { cookie: lab.analyst.cookie });
    expect(source.headers.get("content-disposition")).toContain("runs.zip");
    expect(Buffer.from(await source.arrayBuffer()).equals(content)).toBe(true);
    // The same archive is known, and is read again from what is kept.
    const same = await upload(
      token,
      [
        { name: "runs.zip", content },
        { name: "last.xyz", content: butane("energy=-1.2") },
      ],
      fields,
    );
    expect(same.status).toBe(200);
    const again = await post(token, `/ensembles/${taken.id}/reread`, { level: "B", energyUnit: "kJ/mol" });
    expect(await again.json()).toMatchObject({
      intake: { frames: 4, accepted: 4 },
      levels: [{ name: "B", count: 4 }],
    });
  });

  it("reads SDF and XYZ side by side", async () => {
    const water = frame("", ["O 0 0 0.1173", "H 0 0.7572 -0.4692", "H 0 -0.7572 -0.4692"]);
    const content = zipOf([
      { name: "a.sdf", content: record("w1") },
      { name: "b.xyz", content: water },
    ]);
    const taken = await takenIn(token, [{ name: "both.zip", content }]);
    expect(taken).toMatchObject({ formula: "H2O", intake: { frames: 2, accepted: 2 } });
  });

  it("refuses single entries and says why", async () => {
    const content = zipOf([
      { name: "good.xyz", content: butane("energy=-1.5 entries") },
      { name: "secret.xyz", content: butane("energy=-1.4"), flags: 1 },
      { name: "link.xyz", content: "good.xyz", mode: 0o120777, store: true },
      { name: "inner.zip", content: zipOf([{ name: "x.xyz", content: butane("-1") }]), store: true },
      { name: "inner.xyz.gz", content: gzipSync(butane("energy=-1.3")), store: true },
      { name: "readme.txt", content: "These are the runs of last night.\n" },
    ]);
    const taken = await takenIn(token, [{ name: "mixed.zip", content }], fields);
    expect(taken.intake).toMatchObject({ frames: 1, accepted: 1 });
    const rejected = taken.intake.messages.filter(({ severity }) => severity === "reject");
    expect(rejected.map(({ file, code }) => [file, code])).toEqual([
      ["secret.xyz", "G09"],
      ["link.xyz", "G09"],
      ["inner.zip", "G09"],
      ["inner.xyz.gz", "G09"],
      ["readme.txt", "X03"],
    ]);
    expect(rejected[0]?.message).toContain("encrypted");
    expect(rejected[1]?.message).toContain("link");
    expect(rejected[2]?.message).toContain("packed twice");
  });

  it.each([
    ["without structures", zipOf([{ name: "readme.txt", content: "nothing" }]), /no structure file/],
    ["that is empty", zipOf([]), /empty/],
    ["that ends early", zipOf([{ name: "a.xyz", content: butane("-1") }]).subarray(0, 120), /ends early/],
    ["whose bytes are damaged", damaged(), /damaged/],
    ["whose list lies about a size", zipOf([{ name: "a.xyz", content: butane("-1"), bytes: 10 }]), /damaged/],
    ["whose entries lie over one another", overlapping(), /lie over one another/],
    [
      "with too many entries",
      zipOf([{ name: "a.xyz", content: butane("-1") }], { count: 100_000 }),
      /10,000 files/,
    ],
    ["inside of gzip", gzipSync(zipOf([{ name: "a.xyz", content: butane("-1") }])), /packed twice/],
  ])("%s is refused, and nothing stays (security E02)", async (title, content, words) => {
    const before = await storedRows();
    const response = await upload(token, [{ name: `${title}.zip`, content }], fields);
    expect(response.status).toBe(422);
    expect((await response.json()).detail).toMatch(words);
    expect(await storedRows()).toEqual(before);
  });

  it("is stopped as soon as it unpacks beyond the limit, told or not", async () => {
    withEnv({ MAX_FILE_BYTES: 100_000 });
    const large = "x".repeat(99_000);
    const told = zipOf([
      { name: "a.xyz", content: large },
      { name: "b.xyz", content: large },
    ]);
    const untold = zipOf([{ name: "a.xyz", content: butane("-1.5").repeat(500), bytes: 90_000 }]);
    const before = await storedRows();
    expect((await upload(token, [{ name: "told.zip", content: told }], fields)).status).toBe(413);
    expect([413, 422]).toContain(
      (await upload(token, [{ name: "untold.zip", content: untold }], fields)).status,
    );
    expect(await storedRows()).toEqual(before);
  });
});

function damaged(): Buffer {
  const whole = zipOf([{ name: "a.xyz", content: BUTANE.join("\n").repeat(20) }]);
  return Buffer.from(whole).fill(0xff, 60, 90);
}

function overlapping(): Buffer {
  const content = butane("-1.5");
  return zipOf(Array.from({ length: 500 }, (_, k) => ({ name: `${k}.xyz`, content, offset: 0 })));
}
