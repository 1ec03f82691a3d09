import { existsSync, readFileSync } from "node:fs";
import path from "node:path";
import { describe, expect, it } from "vitest";
import { KEY_GROUPS, keysAreOn, keysInForce } from "./keys.ts";
import { WORD_GROUPS, wordId } from "./words.ts";

const PRODUCT = path.resolve(import.meta.dirname, "../../../../shared/product.md");
const all = WORD_GROUPS.flatMap(({ words }) => words);

describe("the glossary", () => {
  it("defines each word once, under an address of its own", () => {
    const ids = all.map(({ word }) => wordId(word));
    expect(new Set(ids).size).toBe(all.length);
    expect(ids).not.toContain("");
  });

  it("says no word by itself, and ends each explanation as a sentence", () => {
    for (const { word, means } of all) {
      expect(means.length, word).toBeGreaterThan(30);
      expect(means, word).toMatch(/\.$/);
      expect(means.toLowerCase().startsWith(word.toLowerCase()), word).toBe(false);
    }
  });

  it("points to sections that the methods page has", () => {
    const folder = path.resolve(import.meta.dirname, "../../components/reference");
    const text = ["method", "level", "average"]
      .map((name) => readFileSync(path.join(folder, `${name}-sections.tsx`), "utf8"))
      .join("\n");
    for (const { word, method } of all) {
      if (method !== undefined) expect(text, word).toContain(`id: "${method}"`);
    }
  });

  it.skipIf(!existsSync(PRODUCT))("has every word of the product's own table", () => {
    const table = readFileSync(PRODUCT, "utf8").split("\n## Words")[1]?.split("\n## ")[0] ?? "";
    const rows = [...table.matchAll(/^\| ([a-z -]+) \|/gm)].map((row) => row[1] ?? "");
    const own = rows.filter((word) => word !== "word" && !/^[- ]+$/.test(word));
    expect(own.length).toBeGreaterThan(10);
    const known = all.map(({ word }) => word.toLowerCase());
    for (const word of own) expect(known).toContain(word);
  });
});

describe("the list of keys", () => {
  it("names only what is in force on a page", () => {
    expect(keysInForce(() => false).map(({ title }) => title)).toEqual(["Everywhere"]);
    expect(keysInForce((selector) => selector === "[role=grid]").map(({ title }) => title)).toEqual([
      "Everywhere",
      "Table of conformers",
    ]);
    expect(keysInForce(() => true)).toEqual(KEY_GROUPS);
  });

  it("is opened by its key unless that is switched off", () => {
    expect([keysAreOn(""), keysAreOn("keys=on"), keysAreOn("theme=dark; keys=off")]).toEqual([
      true,
      true,
      false,
    ]);
  });
});
