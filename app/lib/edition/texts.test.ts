import { describe, expect, it } from "vitest";
import { type CitationInput, citationBibtex, citationCff, citationText } from "./citation.ts";
import { conformerFiles } from "./conformer-files.ts";
import { type MethodsInput, methodsText } from "./methods-text.ts";
import { extentWords } from "./summary.ts";

const NBSP = /\u00a0/g;

const input: MethodsInput = {
  formula: "C5H12",
  atoms: 17,
  files: [{ format: "XYZ", sha256: `${"9c410b7e".padEnd(60, "0")}5d20` }],
  frames: 400,
  accepted: 397,
  held: 3,
  recipe: {
    version: 1,
    levelName: "MMFF94",
    window: null,
    energyTolerance: 0.15,
    rmsdTolerance: 0.25,
    atoms: "heavy+polarH",
    symmetry: true,
    mirror: "merge",
    chirality: "achiral",
    chiralityOverridden: false,
  },
  kept: 31,
  dropped: 366,
  outsideWindow: 0,
  withoutEnergy: 0,
  upperBounds: 0,
  level: { energyKind: "electronic", kindStated: true },
  populations: { temperature: 310, weights: "copies", weightsChosen: false },
  version: "0.1.0",
};
const text = (change: Partial<MethodsInput> = {}) =>
  methodsText({ ...input, ...change }).text.replace(NBSP, " ");

describe("the methods text", () => {
  it("says what was done with its figures and sources", () => {
    expect(text()).toContain(
      "400 structures of C5H12 (17 atoms) were read from one XYZ file (SHA-256 9c410b7e … 5d20); 397 were accepted and 3 held back.",
    );
    expect(text()).toContain("its energy lay within 0.15 kcal/mol of it");
    expect(text()).toContain("was at most 0.250 Å");
    expect(text()).toContain("(J. Opt. Soc. Am. A 1987, 4, 629; Acta Cryst. A 2005, 61, 478)");
    expect(text()).toContain("This left 31 distinct conformers out of 397 structures.");
    expect(text()).toContain("with electronic energies at 310 K");
    expect(text()).toContain("constants CODATA 2022");
  });

  it("claims nothing that was not done", () => {
    const bare = text({
      recipe: { ...input.recipe, levelName: null, energyTolerance: null, symmetry: false, mirror: "keep" },
      level: null,
      populations: null,
    });
    expect(bare).toContain("in the order of the file");
    expect(bare).not.toMatch(/energ(y|ies) lay|Populations|exp\(/);
    expect(bare).toContain("atoms compared in file order");
    expect(bare).toContain("mirror images were kept apart");
    expect(text({ upperBounds: 2 })).toContain("Of 2 comparisons only an upper bound");
    expect(text({ outsideWindow: 7, recipe: { ...input.recipe, window: 3 } })).toContain(
      "Structures more than 3.00 kcal/mol above the lowest were left out (7).",
    );
  });

  it("names what a person assumed", () => {
    const { assumptions } = methodsText({
      ...input,
      recipe: { ...input.recipe, chirality: "achiral", chiralityOverridden: true },
      level: { energyKind: "electronic", kindStated: false },
      populations: { temperature: 298.15, weights: "degeneracy", weightsChosen: true },
    });
    expect(assumptions.join(" ")).toMatch(
      /stated by a person.*nobody said.*chosen by a person.*not published thresholds/,
    );
    expect(methodsText(input).assumptions).toHaveLength(1);
  });
});

const cited: CitationInput = {
  team: "Estuary & Sons",
  ensemble: "2_{Butyl} 50% mix",
  number: 2,
  title: 'With "shifts"\nand more',
  frozenAt: "2026-12-01T14:02:11.000Z",
  contentSha256: "e07a91c3".padEnd(64, "4"),
  version: "0.1.0",
};

describe("citations", () => {
  it("name team, ensemble, edition, date, checksum and version", () => {
    expect(citationText(cited)).toBe(
      `Estuary & Sons, 2_{Butyl} 50% mix, conformer ensemble, edition 2 (1 December 2026), SHA-256 ${cited.contentSha256}, Lowlying 0.1.0.`,
    );
  });

  it("escape what BibTeX gives a meaning", () => {
    const entry = citationBibtex(cited);
    expect(entry).toContain("@misc{lowlying-e07a91c3,");
    expect(entry).toContain("author = {{Estuary \\& Sons}}");
    expect(entry).toContain("2\\_\\{Butyl\\} 50\\% mix");
    expect(entry).toContain("year = {2026}");
  });

  it("are a CITATION.cff whose scalars are quoted", () => {
    const lines = citationCff(cited).trimEnd().split("\n");
    expect(lines[0]).toBe("cff-version: 1.2.0");
    expect(lines).toContain('version: "2"');
    expect(lines).toContain('date-released: "2026-12-01"');
    expect(lines.find((line) => line.startsWith("abstract"))).toBe(
      'abstract: "With \\"shifts\\" and more. Computed with Lowlying 0.1.0."',
    );
  });
});

describe("one file a conformer", () => {
  const content = {
    ensemble: {
      atoms: 2,
      charge: { value: -1, origin: "file" },
      multiplicity: { value: 2, origin: "assumed" },
    },
    kept: Array.from({ length: 10 }, (_, k) => ({ frame: 3 * k + 1, relativeEnergy: k / 2 })),
    populations: null,
  } as unknown as Parameters<typeof conformerFiles>[0];
  const xyz = content.kept
    .map(() => '2\nProperties=x name="a b"\nO     0.5   -0   1 O1\nH     0  0.25  -1 H2\n')
    .join("");

  it("is plain XYZ with charge and multiplicity, named in the order of the set, with a list", () => {
    const files = [...conformerFiles(content, xyz)];
    expect(files).toHaveLength(11);
    expect(files[0]).toEqual({
      name: "c01-frame-1.xyz",
      text: "2\ncharge=-1 multiplicity=2 conformer=c1 frame=1 relative_kcal_mol=0\nO 0.5 0.0 1.0\nH 0.0 0.25 -1.0\n",
    });
    expect(files[9]?.name).toBe("c10-frame-28.xyz");
    expect(files[10]?.name).toBe("conformers.txt");
    expect(files[10]?.text.split("\n")[2]).toBe("c02-frame-4.xyz\tc2\t4\t0.5\t\t-1\t2");
  });

  it("refuses structures that are not those of the edition", () => {
    expect(() => [...conformerFiles(content, "2\nx\nO 0 0 0\nH 0 0 1\n")]).toThrow(RangeError);
  });
});

it("says in words how stretched a shape is among the others", () => {
  expect(extentWords(10, [10, 5, 7])).toBe("stretched out");
  expect(extentWords(5, [10, 5, 7])).toBe("folded");
  expect(extentWords(7.4, [10, 5, 7.4])).toBe("half stretched");
  expect(extentWords(5, [5, 5.01])).toBe("as long as the others");
});
