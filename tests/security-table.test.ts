import { existsSync, readFileSync } from "node:fs";
import path from "node:path";
import { describe, expect, it } from "vitest";

// The table of DEVELOPERS.md that says what proves each line of the security checklist, held to the files it names.

const ROOT = path.join(import.meta.dirname, "..");
const section = readFileSync(path.join(ROOT, "DEVELOPERS.md"), "utf8")
  .split("## What proves the security checklist")[1]
  ?.split("\n## ")[0];
const rows = [...(section ?? "").matchAll(/^\| ([A-G]\d\d) +\| (.*) \|$/gm)].map(
  ([, code = "", proof = ""]) => ({
    code,
    proof,
  }),
);

/** Lines of the checklist: A 9, B 9, C 7, D 8, E 10, G 7. */
const COUNTS: Record<string, number> = { A: 9, B: 9, C: 7, D: 8, E: 10, G: 7 };
const CODES = Object.entries(COUNTS).flatMap(([letter, count]) =>
  Array.from({ length: count }, (_, k) => `${letter}${String(k + 1).padStart(2, "0")}`),
);

/** The tests that a row names, file by file. */
function namedTests(proof: string): { file: string; title: string }[] {
  return [...proof.matchAll(/`([\w./-]+\.(?:test|spec)\.tsx?)`: ((?:"[^"]+"(?:; )?)+)/g)].flatMap(
    ([, file = "", titles = ""]) =>
      [...titles.matchAll(/"([^"]+)"/g)].map(([, title = ""]) => ({ file, title })),
  );
}

/** Beginnings of tests and groups of a file as they are written, quotes left out. */
function titlesOf(file: string): string[] {
  const text = readFileSync(path.join(ROOT, file), "utf8");
  const titles = text.matchAll(
    /(?:\b(?:it|test|describe)(?:\.\w+)*|\))\(\s*(["'`])((?:\\.|(?!\1)[^\\])*)\1/gs,
  );
  return [...titles].map(([, , title = ""]) => title.replaceAll("\\", ""));
}

describe("the table of what proves the security checklist", () => {
  it("has every line of the checklist once", () => {
    const codes = rows.map(({ code }) => code);
    expect(codes.filter((code) => !code.startsWith("F"))).toEqual(CODES);
    expect(new Set(codes).size).toBe(codes.length);
  });

  it.each(rows)("$code: its tests are there, or a check with its date is recorded", ({ proof }) => {
    const tests = namedTests(proof);
    expect(tests.length > 0 || /recorded check: \d{4}-\d\d-\d\d/.test(proof)).toBe(true);
    for (const { file, title } of tests) {
      expect(existsSync(path.join(ROOT, file)), file).toBe(true);
      expect(
        titlesOf(file).some((one) => one.includes(title)),
        `${file}: ${title}`,
      ).toBe(true);
    }
  });

  it.each(rows)(
    "$code: stands in the title of a test that the row names, or of its group",
    ({ code, proof }) => {
      const marked = new RegExp(`\\([^)]*\\b${/[EG]/.test(code) ? "(?:security )?" : ""}${code}\\b`);
      const files = [...new Set(namedTests(proof).map(({ file }) => file))];
      expect(files.some((file) => titlesOf(file).some((title) => marked.test(title)))).toBe(true);
    },
  );
});
