import { Molecule as Drawing } from "openchemlib";
import { describe, expect, it, test } from "vitest";
import { mulberry } from "../../../tests/factories/embed.ts";
import { type Molecule, mirrored, molecule, renamed } from "../../../tests/factories/molecule.ts";
import { fromConfiguration } from "../chem/stereo.ts";
import { type Classification, FrameClassifier, graphOf } from "./classify.ts";
import { arrangementWords } from "./configuration-words.ts";
import { configurationQuestion } from "./reading-questions.ts";

/** Frames of these molecules, each a little shaken. */
function added(molecules: readonly Molecule[], classifier = new FrameClassifier()): FrameClassifier {
  molecules.forEach(({ graph, positions }, k) => {
    const random = mulberry(k + 1);
    classifier.add({
      frame: k + 1,
      file: "a.sdf",
      line: 1 + 20 * k,
      elements: graph.elements,
      isotopes: graph.isotopes,
      positions: positions.map((x) => x + 0.01 * (random() - 0.5)),
    });
  });
  return classifier;
}

const states = ({ frames }: Classification) => frames.map(({ state }) => state[0]).join("");
const [r, s] = [molecule("F[C@H](Cl)Br"), molecule("F[C@@H](Cl)Br")];

/** The letter that a general drawing library gives the only centre, or double bond, of the same SMILES. */
function letterOf(smiles: string): string {
  const drawing = Drawing.fromSmiles(smiles);
  drawing.ensureHelperArrays(Drawing.cHelperCIP);
  for (let a = 0; a < drawing.getAtoms(); a++) {
    const parity = drawing.getAtomCIPParity(a);
    if (parity === Drawing.cAtomCIPParityRorM) return "R";
    if (parity === Drawing.cAtomCIPParitySorP) return "S";
  }
  for (let b = 0; b < drawing.getBonds(); b++) {
    const parity = drawing.getBondCIPParity(b);
    if (parity === Drawing.cBondCIPParityEorP) return "E";
    if (parity === Drawing.cBondCIPParityZorM) return "Z";
  }
  return "none";
}

describe("R, S, E and Z", () => {
  // Against OpenChemLib's assignment from the same SMILES.
  it.each([
    ...[
      "F[C@H](Cl)Br",
      "F[C@@H](Cl)Br",
      "C[C@H](O)F",
      "C[C@@H](O)F",
      "Br[C@](C)(N)O",
      "C[S@](=O)Cl",
      "C[S@@](=O)Cl",
    ],
    ...["[2H][C@H](C)O", "F/C=C/Cl", "F/C=C\\Cl", "C/C(F)=C(/Cl)Br"],
  ])("of %s", (smiles) => {
    const { group } = added([molecule(smiles)]).finish();
    const { units, signs } = fromConfiguration(graphOf(group!), group!.configuration);
    expect(units).toHaveLength(1);
    expect(arrangementWords(graphOf(group!), units[0]!, signs[0]!)).toMatch(
      new RegExp(` is ${letterOf(smiles)}$`),
    );
  });

  it("are left out where more than the next atoms would have to be ranked", () => {
    const { group } = added([molecule("CC[C@H](C)O")]).finish();
    const { units, signs } = fromConfiguration(graphOf(group!), group!.configuration);
    expect(arrangementWords(graphOf(group!), units[0]!, signs[0]!)).toBeNull();
  });
});

describe("several configurations of one molecule (row S23)", () => {
  it("are a choice, the one of most frames first and taken", () => {
    const result = added([s, r, r, r, r]).finish();
    expect(states(result)).toBe("haaaa");
    expect(result.configurations).toEqual([
      { first: [2, 3, 4, 5], frames: 4, words: "C2 is R" },
      { first: [1], frames: 1, words: "C2 is S" },
    ]);
    expect(configurationQuestion(result.configurations)).toMatchObject({
      id: "configuration",
      code: "S23",
      reason:
        "Frame 1: C2 is S; elsewhere C2 is R. The one with most frames was taken and the others are held; those of the one you choose are used instead. Nothing is averaged across configurations.",
      options: [
        { id: "frame:2", text: "C2 is R", proposed: true },
        { id: "frame:1", text: "C2 is S", detail: "1 frame, the first is 1.", proposed: false },
      ],
    });
  });

  it("the one of a frame that is chosen is the ensemble's, the others are held", () => {
    const classifier = added([s, r, r, r, r]);
    const chosen = classifier.finish({ configuration: 1 });
    expect(states(chosen)).toBe("ahhhh");
    expect(chosen.frames[1]!.reason).toBe("other-configuration");
    expect(chosen.configurations.map(({ words, frames }) => [words, frames])).toEqual([
      ["C2 is S", 1],
      ["C2 is R", 4],
    ]);
    // A frame of what is taken already, or of none, changes nothing.
    expect(states(classifier.finish({ configuration: 3 }))).toBe("haaaa");
    expect(states(classifier.finish({ configuration: 99 }))).toBe("haaaa");
  });

  it("of equal ones that of the earliest frame is taken; one alone is no choice", () => {
    expect(states(added([s, r, s, r]).finish({ configuration: "most" }))).toBe("ahah");
    expect(configurationQuestion(added([s, r]).finish().configurations).reason).toContain("that comes first");
    expect(added([r, r]).finish().configurations).toEqual([]);
  });

  it("Z among E, and centres that need more than the next atoms", () => {
    const [e, z] = [molecule("C/C=C/C"), molecule("C/C=C\\C")];
    const bonds = added([e, e, z, e]).finish({ configuration: 3 });
    expect(states(bonds)).toBe("hhah");
    expect(bonds.configurations.map(({ words }) => words)).toEqual(["C5=C7 is Z", "C5=C7 is E"]);
    const [one, two] = [molecule("CC[C@H](C)O"), molecule("CC[C@@H](C)O")];
    const { configurations } = added([one, two, one]).finish();
    expect(configurations.map(({ words }) => words)).toEqual([
      "As in frame 1",
      "C8 is inverted: the mirror image",
    ]);
    expect(configurationQuestion(configurations).reason).toMatch(
      /^Frame 2: C8 is inverted: the mirror image; elsewhere as in frame 1\. /,
    );
  });

  it("three of them: diastereomers and the mirror image", () => {
    const one = molecule("C[C@H](O)[C@@H](F)Cl");
    const image = { ...one, positions: mirrored(one.positions) };
    const other = molecule("C[C@H](O)[C@H](F)Cl");
    const classifier = added([one, other, image, one, other, one]);
    const taken = classifier.finish();
    expect(states(taken)).toBe("ahhaha");
    expect(taken.configurations.map(({ first, frames }) => [first, frames])).toEqual([
      [[1, 4, 6], 3],
      [[2, 5], 2],
      [[3], 1],
    ]);
    expect(states(classifier.finish({ configuration: 5 }))).toBe("hahhah");
    expect(states(classifier.finish({ configuration: 3 }))).toBe("hhahhh");
  });

  it("frames that are mapped count: most of all have the say", () => {
    const order = [4, 3, 2, 1, 0];
    const all = [r, r, r, s, s, renamed(s, order), renamed(s, order)];
    const { group } = added(all).finish();
    const again = added(all, new FrameClassifier({ group, map: true }));
    expect(states(again.finish({ configuration: "most" })).replaceAll("r", "a")).toBe("hhhaaaa");
    expect(states(again.finish({ configuration: 1 })).replaceAll("r", "a")).toBe("aaahhhh");
  });
});

describe("one configuration whose equal atoms are exchanged", () => {
  // One meso configuration, R,S and S,R by the numbers of its atoms, beside R,R.
  const [rr, rs] = [molecule("F[C@H](Cl)[C@H](F)Cl"), molecule("F[C@H](Cl)[C@@H](F)Cl")];
  const turned = { ...rs, positions: mirrored(rs.positions) };
  const pair = () => added([rs, rs, rs, turned, turned, turned, rr]);

  it("is held in the same words throughout, so that all its frames go together", () => {
    const chosen = pair().finish({ configuration: 7 });
    expect(states(chosen)).toBe("hhhhhha");
    expect(chosen.configurations.map(({ frames }) => frames)).toEqual([1, 6]);
    const said = chosen.frames.slice(0, 6).map(({ messages }) => messages[0]?.message);
    expect(new Set(said)).toEqual(new Set(["C2 or C5 is inverted."]));
    // Nothing is lost where the meso one is the ensemble.
    expect(states(pair().finish())).toBe("aaaaaah");
    // A further batch that holds the other half of it says the same.
    const batch = added([turned], new FrameClassifier({ group: chosen.group })).finish();
    expect(batch.frames[0]?.messages[0]?.message).toBe("C2 or C5 is inverted.");
  });
});

test("a molecule without stereocentres has no choice", () => {
  const butane = molecule("CCCC");
  expect(
    added([butane, { ...butane, positions: mirrored(butane.positions) }]).finish().configurations,
  ).toEqual([]);
});
