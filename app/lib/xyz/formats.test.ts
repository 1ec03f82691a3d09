import { readdirSync, readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { describe, expect, test } from "vitest";
import { readReport } from "../../../tests/factories/format-report.ts";

// One tiny file for every row of the acceptance tables that the layer before the readers, the XYZ reader and the
// energies answer for, named after its row, beside the report expected of it. See fixtures/formats/README.md.
const folder = fileURLToPath(new URL("../../../fixtures/formats/", import.meta.url));
const names = readdirSync(folder).filter((name) => !name.startsWith(".") && name !== "README.md");
const files = names.filter((name) => !name.endsWith(".json"));

describe("acceptance tables, row by row", () => {
  test("every file has its report, every report its file", () => {
    expect(names.filter((name) => name.endsWith(".json"))).toEqual(files.map((name) => `${name}.json`));
  });

  test.each(files)("%s", async (name) => {
    const report = readReport(name, readFileSync(folder + name));
    await expect(`${JSON.stringify(report, null, 1)}\n`).toMatchFileSnapshot(`${folder + name}.json`);
  });

  test.each(files)("%s byte by byte", (name) => {
    const bytes = readFileSync(folder + name);
    expect(readReport(name, bytes, 1)).toEqual(readReport(name, bytes));
  });
});
