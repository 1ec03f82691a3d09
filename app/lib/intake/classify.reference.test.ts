import { existsSync, readdirSync, readFileSync } from "node:fs";
import { Molecule as Drawing } from "openchemlib";
import { describe, expect, it } from "vitest";
import { readSdf, readXyz, type TestFrames } from "../../../tests/factories/read-xyz.ts";
import { BESIDE, beside, besidePresent, COPIED, readReference } from "../../../tests/factories/reference.ts";
import { perceiveBonds } from "../chem/bonds.ts";
import { perceiveChirality } from "../chem/chirality.ts";
import { type Classification, FrameClassifier } from "./classify.ts";

/**
 * Real ensembles (fixtures/README.md): RDKit minima of known SMILES and published conformers. The bonds expected are
 * those of the SMILES in every frame, nothing contested; chirality that of the molecule.
 */

function classify({ elements, block, comments }: TestFrames): Classification {
  const classifier = new FrameClassifier();
  for (let f = 0; f < block.count; f++) {
    classifier.add({
      frame: f + 1,
      file: "reference",
      line: 1,
      elements,
      isotopes: null,
      positions: block.positions.subarray(3 * block.atoms * f, 3 * block.atoms * (f + 1)),
      energy: comments[f]!,
    });
  }
  return classifier.finish();
}

/** The bond graph of every single frame, and the verdict on all of them together. */
function expectOneMolecule(
  frames: TestFrames,
  bonds: readonly (readonly [number, number])[],
  achiral: boolean,
) {
  const { elements, block } = frames;
  const sorted = bonds.map(([i, j]) => [Math.min(i, j), Math.max(i, j)] as const);
  sorted.sort(([a, b], [c, d]) => a - c || b - d);
  for (let f = 0; f < block.count; f++) {
    const found = perceiveBonds(elements, block.positions, 3 * block.atoms * f);
    expect([...found.bonds]).toEqual(sorted.flat());
    expect([...found.contested]).toEqual([]);
  }
  const result = classify(frames);
  expect(result.frames.filter((frame) => frame.state === "held")).toEqual([]);
  expect(result.messages).toEqual([]);
  expect(result.chirality).toBe(achiral ? "achiral" : "chiral");
  const { graph, group } = result;
  for (let f = 0; f < block.count; f++) {
    const lowest = { positions: block.positions, offset: 3 * block.atoms * f };
    expect(perceiveChirality(graph!, group!.configuration, lowest).chirality).toBe(result.chirality);
  }
  return result;
}

describe("reference ensembles", () => {
  it.each(COPIED)("%s: every frame has the bonds of the molecule and is accepted", (file, expected) => {
    const set = readReference(file, expected);
    const result = expectOneMolecule(set.frames, set.bonds, set.achiral);
    expect(result.frames.every((frame) => frame.state === "accepted")).toBe(true);
  });
});

describe.skipIf(!besidePresent)("every file of ../shared/reference", () => {
  it.each(BESIDE)("%s", (file, expected) => {
    const set = readReference(file, expected);
    expectOneMolecule(set.frames, set.bonds, set.achiral);
  });

  const levels = ["ac-ala-levels", "alkane-conformers", "cysteine-conformers", "ensembles"].flatMap(
    (folder) =>
      (existsSync(beside + folder) ? readdirSync(beside + folder) : [])
        .filter((name) => /\.(xyz|sdf)$/.test(name))
        .map((name) => `${folder}/${name}`),
  );

  it.each(levels)("%s", (path) => {
    const name = path.replace(/\.(xyz|sdf)$/, "");
    const base = [name, name.replace(/\.[^./]+$/, "")].find((one) =>
      existsSync(`${beside}${one}.expected.json`),
    );
    const json = JSON.parse(readFileSync(`${beside}${base}.expected.json`, "utf8"));
    const geometry = json.geometry ?? json;
    const frames = path.endsWith(".sdf")
      ? readSdf(beside + path, "MMFF94_ENERGY_KCAL_MOL")
      : readXyz(beside + path);
    expectOneMolecule(frames, geometry.bonds_0based, geometry.achiral_molecule);
  });

  // SMILES by their README; formula and centres as a general drawing library has them.
  it.each([
    ["large/S.xyz.gz", "C[C@H](O)c1cnc(cc1F)C(=O)NCCSC[C@@H](CC#N)OC(=O)NCC"],
    ["large/M.xyz.gz", "CC(C)(C)c1cc(cc(c1)C(C)(C)C)C(=O)N[C@@H](Cc1ccccc1)CC(F)(F)F"],
  ])("%s: all accepted, %s", (path, smiles) => {
    const drawing = Drawing.fromSmiles(smiles);
    const result = classify(readXyz(beside + path));
    expect(result.frames.filter((frame) => frame.state === "held")).toEqual([]);
    const parts = (formula: string): string[] => (formula.match(/[A-Z][a-z]?\d*/g) ?? []).sort();
    expect(parts(result.formula)).toEqual(parts(drawing.getMolecularFormula().formula));
    expect(result.chirality).toBe("chiral");
    expect(result.group!.configuration.centres).toHaveLength(drawing.getStereoCenterCount());
    expect(result.group!.configuration.doubleBonds).toEqual([]);
  });
});
