import { execFileSync } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { deflateRawSync } from "node:zlib";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { crc32, writeZip, type ZipEntry } from "./zip.ts";

const text = (value: string) => new TextEncoder().encode(value);
const archive = (entries: ZipEntry[]) => Buffer.concat([...writeZip(entries)]);

/** Python's own reader of archives, where the machine has one: it checks headers, sizes and checksums. */
const READ = `
import json, sys, zipfile
z = zipfile.ZipFile(sys.argv[1])
bad = z.testzip()
print(json.dumps({"bad": bad, "files": {i.filename: [z.read(i).decode("utf-8"), i.compress_type, list(i.date_time)] for i in z.infolist()}}))
`;
const python = (() => {
  try {
    execFileSync("python3", ["-c", "import zipfile"]);
    return true;
  } catch {
    return false;
  }
})();

let folder = "";
beforeAll(() => {
  folder = mkdtempSync(path.join(os.tmpdir(), "zip-"));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe("a zip archive", () => {
  it("has the check value of CRC-32", () => {
    // The check value of CRC-32/ISO-HDLC in the catalogue of parametrised CRC algorithms.
    expect(crc32(text("123456789"))).toBe(0xcbf43926);
    expect(crc32(new Uint8Array())).toBe(0);
  });

  it.runIf(python)("is read by another program, packed and stored entries alike", () => {
    const long = "the same line again\n".repeat(500);
    const file = path.join(folder, "a.zip");
    writeFileSync(
      file,
      archive([
        { name: "short.txt", data: text("a"), deflated: deflateRawSync("a") },
        { name: "folder/lång.txt", data: text(long), deflated: deflateRawSync(long) },
        { name: "empty", data: new Uint8Array() },
      ]),
    );
    const found = JSON.parse(execFileSync("python3", ["-c", READ, file], { encoding: "utf8" }));
    expect(found.bad).toBeNull();
    expect(found.files["short.txt"]).toEqual(["a", 0, [1980, 1, 1, 0, 0, 0]]);
    expect(found.files["folder/lång.txt"].slice(0, 2)).toEqual([long, 8]);
    expect(found.files.empty[0]).toBe("");
  });

  it("gives the same bytes for the same files", () => {
    const entries = [{ name: "a", data: text("b") }];
    expect(archive(entries).equals(archive(entries))).toBe(true);
  });

  it.each(["../a", "/a", "a//b", "", "a\\b", "c:a", "a\nb", "./a"])("refuses %j as a name", (name) => {
    expect(() => archive([{ name, data: text("x") }])).toThrow(RangeError);
  });

  it("refuses a name that is there already", () => {
    const twice = [
      { name: "a", data: text("x") },
      { name: "a", data: text("y") },
    ];
    expect(() => archive(twice)).toThrow(/twice/);
  });
});
