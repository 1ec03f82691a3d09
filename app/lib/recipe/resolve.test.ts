import { describe, expect, it } from "vitest";
import { DomainError } from "../errors.ts";
import { type SiftRequest, siftRecipeSchema, siftRequestSchema } from "./recipe.ts";
import { canonicalRecipe, type EnsembleFacts, resolveRecipe } from "./resolve.ts";

const facts: EnsembleFacts = {
  levels: [
    { id: "a1", name: "MMFF94" },
    { id: "b2", name: "a1" },
  ],
  chirality: "achiral",
};
const of = (chirality: EnsembleFacts["chirality"]) => ({ ...facts, chirality });

function faultOf(request: SiftRequest, ensemble: EnsembleFacts): DomainError {
  try {
    resolveRecipe(request, ensemble);
  } catch (error) {
    if (error instanceof DomainError) return error;
    throw error;
  }
  throw new Error("nothing was refused");
}

describe("resolving a request", () => {
  it("fills in every default", () => {
    expect(resolveRecipe({ level: "MMFF94" }, facts)).toEqual({
      version: 1,
      level: "a1",
      levelName: "MMFF94",
      window: null,
      energyTolerance: 0.15,
      rmsdTolerance: 0.2,
      atoms: "heavy+polarH",
      symmetry: true,
      mirror: "merge",
      chirality: "achiral",
      chiralityOverridden: false,
    });
  });

  it("keeps what was asked for", () => {
    const request: SiftRequest = {
      level: "a1",
      window: 3,
      energyTolerance: null,
      rmsdTolerance: 0,
      atoms: "all",
      symmetry: false,
      mirror: "keep",
      chirality: "chiral",
    };
    expect(resolveRecipe(siftRequestSchema.parse(request), facts)).toMatchObject({
      level: "a1",
      window: 3,
      energyTolerance: null,
      rmsdTolerance: 0,
      atoms: "all",
      symmetry: false,
      mirror: "keep",
      chirality: "chiral",
      chiralityOverridden: true,
    });
  });

  it("takes a level by its id before its name", () => {
    expect(resolveRecipe({ level: "a1" }, facts).levelName).toBe("MMFF94");
    expect(resolveRecipe({ level: "b2" }, facts).levelName).toBe("a1");
  });

  it.each([
    ["achiral", "auto", "merge", "achiral", false],
    ["chiral", "auto", "keep", "chiral", false],
    ["unsure", "auto", "keep", "chiral", false],
    ["unsure", "chiral", "keep", "chiral", false],
    ["unsure", "achiral", "merge", "achiral", true],
    ["chiral", "achiral", "merge", "achiral", true],
    ["achiral", "chiral", "keep", "chiral", true],
  ] as const)(
    "found %s, asked %s: mirror %s, counts as %s",
    (found, asked, mirror, chirality, overridden) => {
      expect(resolveRecipe({ level: null, chirality: asked }, of(found))).toMatchObject({
        mirror,
        chirality,
        chiralityOverridden: overridden,
      });
    },
  );

  it.each([
    ["chiral", "auto"],
    ["unsure", "auto"],
    ["achiral", "chiral"],
  ] as const)("found %s, asked %s: refuses to merge mirror images, in words", (found, asked) => {
    const error = faultOf({ level: null, mirror: "merge", chirality: asked }, of(found));
    expect(error.code).toBe("invalid");
    expect(error.faults).toMatchObject([{ field: "mirror" }]);
    expect(error.message).toContain("enantiomer");
    expect(error.message).toContain('chirality: "achiral"');
  });

  it("merges in a chiral molecule that the request calls achiral", () => {
    const recipe = resolveRecipe({ level: null, mirror: "merge", chirality: "achiral" }, of("chiral"));
    expect(recipe).toMatchObject({ mirror: "merge", chirality: "achiral", chiralityOverridden: true });
  });

  it("refuses an unknown level and names those there are", () => {
    const error = faultOf({ level: "xtc" }, facts);
    expect([error.code, error.faults[0]!.field]).toEqual(["invalid", "level"]);
    expect(error.message).toContain("“MMFF94”");
    expect(faultOf({ level: "xtc" }, { ...facts, levels: [] }).message).toContain("none");
  });

  it("without a level has no energy tolerance and refuses a window", () => {
    const recipe = resolveRecipe({ level: null, energyTolerance: 0.5 }, facts);
    expect([recipe.level, recipe.levelName, recipe.window, recipe.energyTolerance]).toEqual([
      null,
      null,
      null,
      null,
    ]);
    expect(resolveRecipe({ level: null, window: null }, facts).window).toBeNull();
    expect(faultOf({ level: null, window: 3 }, facts).faults[0]!.field).toBe("window");
  });
});

describe("canonical text", () => {
  it("is the same for requests that mean the same", () => {
    const bare = resolveRecipe({ level: "MMFF94" }, facts);
    const spelt = resolveRecipe(
      {
        chirality: "auto",
        mirror: "auto",
        symmetry: true,
        atoms: "heavy+polarH",
        rmsdTolerance: 0.2,
        energyTolerance: 0.15,
        window: null,
        level: "a1",
      },
      facts,
    );
    const reordered = siftRecipeSchema.parse(
      JSON.parse(JSON.stringify(Object.fromEntries(Object.entries(spelt).reverse()))),
    );
    expect(canonicalRecipe(spelt)).toBe(canonicalRecipe(bare));
    expect(canonicalRecipe(reordered)).toBe(canonicalRecipe(bare));
    expect(JSON.parse(canonicalRecipe(bare))).toEqual(bare);
  });

  it("takes -0 as 0 and differs where a tolerance does", () => {
    const text = (rmsdTolerance: number, energyTolerance: number) =>
      canonicalRecipe(resolveRecipe({ level: "a1", rmsdTolerance, energyTolerance }, facts));
    expect(text(-0, -0)).toBe(text(0, 0));
    expect(resolveRecipe({ level: "a1", rmsdTolerance: -0 }, facts).rmsdTolerance).toBe(0);
    expect(text(0.2, 0.15)).not.toBe(text(0.2, 0.16));
  });
});
