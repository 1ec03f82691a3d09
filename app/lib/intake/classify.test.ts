import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { mulberry } from "../../../tests/factories/embed.ts";
import { type Molecule, mirrored, molecule, renamed } from "../../../tests/factories/molecule.ts";
import { type Classification, FrameClassifier } from "./classify.ts";
import type { ClassifierFrame } from "./frame-record.ts";

type Given = Partial<Pick<ClassifierFrame, "charge" | "multiplicity" | "energy">>;

/** One frame of a molecule, its coordinates a little shaken so that no two are equal. */
function frameOf({ graph, positions }: Molecule, number: number, given: Given = {}): ClassifierFrame {
  const random = mulberry(number);
  return {
    frame: number,
    file: "search.xyz",
    line: 1 + (number - 1) * (graph.elements.length + 2),
    elements: graph.elements,
    isotopes: graph.isotopes,
    positions: positions.map((x) => x + 0.01 * (random() - 0.5)),
    ...given,
  };
}

function classify(frames: readonly ClassifierFrame[], classifier = new FrameClassifier()): Classification {
  for (const frame of frames) classifier.add(frame);
  return classifier.finish();
}

function classifyMolecules(molecules: readonly Molecule[]): Classification {
  return classify(molecules.map((m, k) => frameOf(m, k + 1)));
}

const states = (result: Classification): string => result.frames.map((f) => f.state[0]).join("");
const saying = (result: Classification, frame: number): string =>
  result.frames[frame - 1]!.messages.map((m) => `${m.code} ${m.severity}: ${m.message}`).join(" | ");

describe("an ensemble of one molecule", () => {
  it("accepts every frame and says what it is", () => {
    const alanine = molecule("C[C@H](N)C(=O)O");
    const result = classifyMolecules([alanine, alanine, alanine]);
    expect(states(result)).toBe("aaa");
    expect(result).toMatchObject({
      formula: "C3H7NO2",
      shape: 0,
      chirality: "chiral",
      chiralityNote: "One stereocentre, C5.",
      messages: [],
    });
    expect(result.group).toMatchObject({
      charge: null,
      configuration: { centres: [[4, expect.any(Number)]] },
    });
    expect(result.graph!.bonds).toEqual(alanine.graph.bonds);
  });

  it("gives every frame a place among those of its elements", () => {
    const [water, methane] = [molecule("O"), molecule("C")];
    const classifier = new FrameClassifier();
    const places = [water, methane, water, water].map((m, k) => classifier.add(frameOf(m, k + 1)));
    expect(places.map(({ shape, indexInShape }) => [shape, indexInShape])).toEqual([
      [0, 0],
      [1, 0],
      [0, 1],
      [0, 2],
    ]);
    expect(places.every(({ mapping }) => mapping === null)).toBe(true);
  });

  it("has no group without frames, or when none can be used", () => {
    expect(classify([])).toMatchObject({ group: null, formula: "", frames: [] });
    const water = molecule("O");
    const zero = { ...frameOf(water, 1), positions: new Float64Array(9) };
    expect(classify([zero])).toMatchObject({
      group: null,
      frames: [{ state: "held", reason: "unreadable" }],
    });
  });
});

describe("X12, X37: another composition or charge", () => {
  it("proposes the largest and names both formulas", () => {
    const [ethanol, propane] = [molecule("CCO"), molecule("CCC")];
    const result = classifyMolecules([propane, ethanol, ethanol]);
    expect(states(result)).toBe("haa");
    expect(result.frames[0]).toMatchObject({
      reason: "other-composition",
      messages: [{ frame: 1, line: 1, file: "search.xyz" }],
    });
    expect(saying(result, 1)).toBe("X12 hold: Another composition: C3H8, where the ensemble is C2H6O.");
    expect(result).toMatchObject({ formula: "C2H6O", shape: 1 });
  });

  it("of equally large ones takes that of the earliest frame", () => {
    const [ethanol, propane] = [molecule("CCO"), molecule("CCC")];
    expect(classifyMolecules([propane, ethanol, ethanol, propane]).formula).toBe("C3H8");
  });

  it("counts isotopes and dummies", () => {
    const [light, heavy] = [molecule("CO"), molecule("[13CH3]O")];
    expect(saying(classifyMolecules([light, light, heavy]), 3)).toContain(
      "[13C]H4O, where the ensemble is CH4O",
    );
    const elements = Uint8Array.of(...light.graph.elements, 0);
    const ghost = {
      ...frameOf(light, 3),
      elements,
      isotopes: null,
      positions: Float64Array.of(...light.positions, 9, 9, 9),
    };
    const result = classify([frameOf(light, 1), frameOf(light, 2), ghost]);
    expect(saying(result, 3)).toContain("CH4O with 1 dummy atom, where the ensemble is CH4O");
  });

  it("holds the minority of another charge or multiplicity; unknown fits all", () => {
    const water = molecule("O");
    const frames = [0, 1, null, 0].map((charge, k) => frameOf(water, k + 1, { charge }));
    const result = classify(frames);
    expect(states(result)).toBe("ahaa");
    expect(saying(result, 2)).toBe("X37 hold: Another charge: +1, where the ensemble has 0.");
    expect(result.group!.charge).toBe(0);
    const spins = [1, 3, 1].map((multiplicity, k) => frameOf(water, k + 1, { multiplicity }));
    expect(saying(classify(spins), 2)).toBe("X37 hold: Another multiplicity: 3, where the ensemble has 1.");
  });

  it("a charge is part of what is counted: two charges of one formula do not add up", () => {
    const [water, methane] = [molecule("O"), molecule("C")];
    const frames = [
      ...[0, 0, 1, 1].map((charge, k) => frameOf(water, k + 1, { charge })),
      ...[5, 6, 7].map((n) => frameOf(methane, n)),
    ];
    expect(classify(frames).formula).toBe("CH4");
  });
});

describe("X13: another order of atoms", () => {
  const ethanol = molecule("CCO");

  it("is held, and said to be the same molecule", () => {
    const reversed = renamed(ethanol, [8, 7, 6, 5, 4, 3, 2, 1, 0]);
    const result = classifyMolecules([ethanol, reversed, ethanol]);
    expect(result.frames[1]!.reason).toBe("other-order");
    expect(saying(result, 2)).toBe(
      "X13 hold: The same molecule with its atoms in another order: atom 1 is H, in the ensemble C.",
    );
  });

  it("is seen too where elements stand in the same places", () => {
    const butanol = molecule("CCCCO");
    // Carbons 1 and 3 exchange their numbers, hydrogens keep theirs.
    const order = [...Array(15).keys()];
    const [first, third] = [...order.keys()].filter(
      (a) => butanol.graph.elements[a] === 6 && [0, 7].includes(a),
    );
    order[first!] = third!;
    order[third!] = first!;
    const result = classifyMolecules([butanol, butanol, renamed(butanol, order)]);
    expect(saying(result, 3)).toBe(
      "X13 hold: The same molecule with its atoms in another order: elements stand in the same places, bonds do not.",
    );
  });

  it("is that too where two equal hydrogens of different carbons stand in each other's place", () => {
    const order = [...Array(9).keys()];
    const { graph } = ethanol;
    const hydrogenOf = (carbon: number) =>
      graph.neighbours
        .subarray(graph.offsets[carbon]!, graph.offsets[carbon + 1]!)
        .find((a) => graph.elements[a] === 1)!;
    const carbons = order.filter((a) => graph.elements[a] === 6);
    const [a, b] = [hydrogenOf(carbons[0]!), hydrogenOf(carbons[1]!)];
    order[a] = b;
    order[b] = a;
    const result = classifyMolecules([ethanol, ethanol, renamed(ethanol, order)]);
    expect(result.frames[2]!.reason).toBe("other-order");
    expect(saying(result, 3)).toMatch(
      /^X13 hold: The same molecule with its atoms in another order: H\d has moved .* equal atoms are exchanged\.$/,
    );
  });

  it("is another species where the bonds differ too", () => {
    const ether = molecule("COC");
    const result = classifyMolecules([ethanol, ethanol, ether]);
    expect(result.frames[2]!.reason).toBe("other-species");
    expect(saying(result, 3)).toContain("X38 hold: Another species: the same composition, but other bonds");
  });
});

/** The same atoms, moved by hand: what stands at `from` with all in `with` goes along `by`. */
function moved(m: Molecule, atoms: readonly number[], to: readonly number[]): Molecule {
  const positions = m.positions.slice();
  for (const atom of atoms) for (let k = 0; k < 3; k++) positions[3 * atom + k]! += to[k]!;
  return { ...m, positions };
}

const vector = (m: Molecule, from: number, to: number): number[] =>
  [0, 1, 2].map((k) => m.positions[3 * to + k]! - m.positions[3 * from + k]!);

/** Puts `atom` beyond `partner`, seen from `from`, at a distance. */
function placedBehind(m: Molecule, atom: number, from: number, partner: number, distance: number): Molecule {
  const out = vector(m, from, partner);
  const size = Math.hypot(...out);
  const target = [0, 1, 2].map((k) => m.positions[3 * partner + k]! + (out[k]! / size) * distance);
  return moved(
    m,
    [atom],
    target.map((x, k) => x - m.positions[3 * atom + k]!),
  );
}

describe("X38: another species", () => {
  // N1 H2 H3 C4 H5 H6 C7 O8 O9 H10
  const glycine = molecule("NCC(=O)O");
  const [n, c, acid, acidH] = [0, 3, 6, 9];

  it("a moved proton is named with where it came from and went to", () => {
    const zwitterion = placedBehind(glycine, acidH, c, n, 1.03);
    const result = classifyMolecules([glycine, glycine, zwitterion]);
    expect(result.frames[2]!.reason).toBe("other-species");
    expect(saying(result, 3)).toBe(
      "X38 hold: Another species (proton transfer): H10 has moved from O9 to N1.",
    );
  });

  it("the same molecule with a hydrogen at the other oxygen is no other species: X13 says what moved", () => {
    const carbonyl = 7;
    const other = placedBehind(glycine, acidH, acid, carbonyl, 0.98);
    expect(saying(classifyMolecules([glycine, glycine, other]), 3)).toBe(
      "X13 hold: The same molecule with its atoms in another order: H10 has moved from O9 to O8, and equal atoms are exchanged.",
    );
  });

  it("dissociation", () => {
    const salt = molecule("CO");
    const apart = moved(
      salt,
      [4, 5],
      vector(salt, 0, 4).map((x) => 2 * x),
    );
    expect(saying(classifyMolecules([salt, salt, apart]), 3)).toBe(
      "X38 hold: Another species (dissociation): bond C1–O5 is gone.",
    );
  });

  it("ring closure and ring opening", () => {
    const elements = Uint8Array.of(7, 7, 7);
    const open = { elements, positions: Float64Array.of(0, 0, 0, 1.45, 0, 0, 2.2, 1.9, 0) };
    const closed = { elements, positions: Float64Array.of(0, 0, 0, 1.45, 0, 0, 0.72, 1.25, 0) };
    const chain = { elements, positions: Float64Array.of(0, 0, 0, 1.45, 0, 0, 2.2, 1.2, 0) };
    const frame = (of: typeof open, k: number): ClassifierFrame => ({
      frame: k,
      file: "a.xyz",
      line: k,
      isotopes: null,
      ...of,
      positions: of.positions.map((x) => x + 1e-4 * k),
    });
    expect(saying(classify([frame(chain, 1), frame(chain, 2), frame(closed, 3)]), 3)).toBe(
      "X38 hold: Another species (ring closure): bond N1–N3 is new.",
    );
    expect(saying(classify([frame(closed, 1), frame(closed, 2), frame(chain, 3)]), 3)).toBe(
      "X38 hold: Another species (ring opening): bond N1–N3 is gone.",
    );
    expect(saying(classify([frame(chain, 1), frame(chain, 2), frame(open, 3)]), 3)).toBe(
      "X38 hold: Another species (dissociation): bond N2–N3 is gone.",
    );
  });

  it("a bond stretched just beyond the rule tells how far", () => {
    const salt = molecule("CO");
    const stretched = moved(
      salt,
      [4, 5],
      vector(salt, 0, 4).map((x) => 0.25 * x),
    );
    expect(saying(classifyMolecules([salt, salt, stretched]), 3)).toMatch(
      /bond C1–O5 is gone \(1\.2\d of the summed radii\)/,
    );
  });

  it("the majority decides, and in a tie the earliest frame", () => {
    const zwitterion = placedBehind(glycine, acidH, c, n, 1.03);
    expect(states(classifyMolecules([glycine, zwitterion, zwitterion]))).toBe("haa");
    expect(states(classifyMolecules([zwitterion, glycine, glycine, zwitterion]))).toBe("ahha");
  });
});

describe("X40: another configuration", () => {
  it("an inverted centre is named", () => {
    const [one, two] = [molecule("C[C@H](O)[C@@H](F)Cl"), molecule("C[C@H](O)[C@H](F)Cl")];
    const result = classifyMolecules([one, one, two]);
    expect(result.frames[2]!.reason).toBe("other-configuration");
    expect(saying(result, 3)).toBe("X40 hold: C9 is inverted.");
  });

  it("the mirror image is called that", () => {
    const one = molecule("C[C@H](O)[C@@H](F)Cl");
    const image = { ...one, positions: mirrored(one.positions) };
    expect(saying(classifyMolecules([one, one, image]), 3)).toBe(
      "X40 hold: C5 and C9 are inverted: the mirror image.",
    );
  });

  it("the mirror image of an achiral or meso molecule belongs to it", () => {
    for (const smiles of ["CCCC", "OC(=O)[C@H](O)[C@H](O)C(=O)O", "C[C@H]1CC[C@@H](C)CC1"]) {
      const one = molecule(smiles);
      const image = { ...one, positions: mirrored(one.positions) };
      expect(states(classifyMolecules([one, image, one]))).toBe("aaa");
    }
  });

  it("cis and trans are told apart, by E and Z where the next atoms decide", () => {
    expect(
      saying(classifyMolecules([molecule("C/C=C/C"), molecule("C/C=C/C", 3), molecule("C/C=C\\C")]), 3),
    ).toBe("X40 hold: The double bond C5=C7 is Z, elsewhere E.");
    const [cis, trans] = [molecule("CC/C(C)=C\\C"), molecule("CC/C(C)=C/C")];
    expect(saying(classifyMolecules([cis, cis, trans]), 3)).toBe(
      "X40 hold: At the double bond C8=C13 C5 and C15 are trans, elsewhere cis.",
    );
  });

  it("a sulfoxide inverts, a sulfone has nothing to invert", () => {
    expect(
      saying(
        classifyMolecules([molecule("C[S@](=O)CC"), molecule("C[S@](=O)CC"), molecule("C[S@@](=O)CC")]),
        3,
      ),
    ).toBe("X40 hold: S5 is inverted: the mirror image.");
    const sulfone = molecule("CS(=O)(=O)CC");
    expect(states(classifyMolecules([sulfone, { ...sulfone, positions: mirrored(sulfone.positions) }]))).toBe(
      "aa",
    );
  });

  it("a protonated amine is held with the hint that it may invert", () => {
    const [one, two] = [molecule("C[N@H+](CC)CCC"), molecule("C[N@@H+](CC)CCC")];
    const result = classifyMolecules([one, one, two]);
    expect(result.frames[2]!.messages[0]!.hint).toContain("N5 carries a hydrogen");
  });

  it("a nearly flat centre is remarked, not held", () => {
    const one = molecule("C[S@](=O)CC");
    const [u, v] = [vector(one, 0, 5), vector(one, 0, 6)];
    const normal = [0, 1, 2].map(
      (k) => u[(k + 1) % 3]! * v[(k + 2) % 3]! - u[(k + 2) % 3]! * v[(k + 1) % 3]!,
    );
    const size = Math.hypot(...normal);
    const height = normal.reduce((sum, x, k) => sum + (x / size) * vector(one, 4, 0)[k]!, 0);
    // Sulfur goes into the plane of its three neighbours.
    const flat = moved(
      one,
      [4],
      normal.map((x) => (x / size) * height),
    );
    const result = classifyMolecules([one, one, flat]);
    expect(states(result)).toBe("aar");
    expect(saying(result, 3)).toContain(
      "X40 remark: S5 is nearly flat: the configuration there cannot be told.",
    );
  });

  it("conjugated single bonds and amides may turn as they like", () => {
    const [one, two] = [molecule("CC(=O)NC", 1), molecule("CC(=O)NC", 4)];
    expect(states(classifyMolecules([one, two]))).toBe("aa");
    for (let seed = 1; seed < 5; seed++) {
      expect(states(classifyMolecules([molecule("C=CC=C", 1), molecule("C=CC=C", seed)]))).toBe("aa");
    }
  });
});

describe("X28, X29, X39, X41, X42", () => {
  const butane = molecule("CCCC");

  it("X28: atoms too close, or all at zero", () => {
    const close = { ...butane, positions: butane.positions.slice() };
    close.positions.set(close.positions.subarray(0, 3), 12);
    close.positions[12]! += 0.3;
    const zero = { ...butane, positions: new Float64Array(42) };
    const frames = [
      frameOf(butane, 1),
      { ...frameOf(close, 2), positions: close.positions },
      { ...frameOf(zero, 3), positions: zero.positions },
    ];
    const result = classify(frames);
    expect(states(result)).toBe("ahh");
    expect(saying(result, 2)).toBe(
      "X28 hold: C1 and C5 are 0.30 Å apart; no two atoms come nearer than 0.5 Å.",
    );
    expect(saying(result, 3)).toBe("X28 hold: All coordinates are zero.");
  });

  it("X28: a lone atom at the origin is no fault", () => {
    const argon: ClassifierFrame = {
      frame: 1,
      file: "a.xyz",
      line: 1,
      elements: Uint8Array.of(18),
      isotopes: null,
      positions: new Float64Array(3),
    };
    expect(states(classify([argon]))).toBe("a");
  });

  it("X29: a drawing, but not a flat molecule", () => {
    const drawn: ClassifierFrame = {
      frame: 1,
      file: "a.xyz",
      line: 1,
      isotopes: null,
      elements: Uint8Array.of(6, 1, 1, 1, 1),
      positions: Float64Array.of(0, 0, 0, 1.1, 0, 0, -1.1, 0, 0, 0, 1.1, 0, 0, -1.1, 0),
    };
    expect(saying(classify([drawn]), 1)).toContain(
      "X29 remark: All z are zero though the molecule is not flat",
    );
    const water: ClassifierFrame = {
      frame: 1,
      file: "a.xyz",
      line: 1,
      isotopes: null,
      elements: Uint8Array.of(8, 1, 1, 8, 1, 1),
      positions: Float64Array.of(0, 0, 0, 0.96, 0, 0, -0.24, 0.93, 0, 3, 0, 0, 3.96, 0, 0, 2.76, 0.93, 0),
    };
    expect(states(classify([water]))).toBe("a");
  });

  it("X39: several fragments are remarked once, not on every frame", () => {
    const complex = molecule("CCO.O.O");
    const result = classifyMolecules([complex, complex]);
    expect(states(result)).toBe("aa");
    expect(result.messages).toEqual([
      {
        code: "X39",
        severity: "remark",
        file: "search.xyz",
        message: "Every frame holds 3 separate fragments: C2H6O and 2 H2O.",
      },
    ]);
  });

  it("X41: a contested distance is remarked with its ratio", () => {
    const elements = Uint8Array.of(8, 1, 1, 8, 1, 1);
    const frame = (k: number, far: number): ClassifierFrame => ({
      frame: k,
      file: "a.xyz",
      line: k,
      elements,
      isotopes: null,
      positions: Float64Array.of(
        0,
        0,
        0,
        0.96 + 1e-5 * k,
        0,
        0,
        -0.24,
        0.93,
        0,
        0.96 + far,
        0,
        0,
        1.2 + far,
        0.93,
        0,
        1.2 + far,
        -0.93,
        0,
      ),
    });
    const result = classify([frame(1, 1.27), frame(2, 2), frame(3, 2.1)]);
    expect(states(result)).toBe("raa");
    expect(saying(result, 1)).toBe("X41 remark: O4 to H2 at 1.31 of the summed radii: not bonded, but near.");
  });

  it("X41: what is near in most frames is said once", () => {
    const cage: ClassifierFrame[] = [1, 2, 3].map((k) => ({
      frame: k,
      file: "a.xyz",
      line: k,
      elements: new Uint8Array(5).fill(6),
      isotopes: null,
      positions: Float64Array.of(
        0,
        0,
        0.93 + 0.001 * k,
        0,
        0,
        -0.935,
        1.24,
        0,
        0,
        -0.62,
        1.074,
        0,
        -0.62,
        -1.074,
        0,
      ),
    }));
    const result = classify(cage);
    expect(states(result)).toBe("aaa");
    expect(result.messages.map((m) => m.message)).toEqual([
      "C1 to C2 is near, but not bonded, in most frames.",
    ]);
  });

  it("X42: an exact copy names the frame it repeats, and energies count", () => {
    const frames = [frameOf(butane, 1, { energy: "-1.5" }), frameOf(butane, 2, { energy: "-1.5" })];
    frames.push({ ...frames[0]!, frame: 3 }, { ...frames[0]!, frame: 4, energy: "-1.6" });
    const result = classify(frames);
    expect(states(result)).toBe("aara");
    expect(saying(result, 3)).toBe(
      "X42 remark: Exact copy: the same coordinates and energy as frame 1, to the last digit.",
    );
  });
});

describe("frames with a bond table", () => {
  const fluoro = molecule("CC(F)F");
  const table = { bonds: Int32Array.from(fluoro.graph.bonds), orders: null, charges: null, radicals: null };
  const hydrogen = fluoro.graph.elements.indexOf(1);
  const carbon = fluoro.graph.neighbours[fluoro.graph.offsets[hydrogen]!]!;
  /** One C-H is 1.35 times as long. */
  const stretched: Molecule = { ...fluoro, positions: fluoro.positions.slice() };
  for (let axis = 0; axis < 3; axis++) {
    const from = fluoro.positions[3 * carbon + axis]!;
    stretched.positions[3 * hydrogen + axis] = from + 1.35 * (fluoro.positions[3 * hydrogen + axis]! - from);
  }
  const withTable = (molecules: readonly Molecule[], classifier?: FrameClassifier) =>
    classify(
      molecules.map((m, k) => ({ ...frameOf(m, k + 1), table })),
      classifier,
    );

  it.each([[[stretched, stretched, fluoro, fluoro]], [[stretched, stretched, fluoro]]])(
    "are held against it, not against what most distances show",
    (molecules) => {
      const result = withTable(molecules);
      expect(states(result)).toBe(molecules.map((m) => (m === fluoro ? "a" : "h")).join(""));
      expect(saying(result, 1)).toMatch(
        /^X38 hold: Another species .* is gone .*Its bond table does not show/,
      );
      expect(result.group?.seen).toBeUndefined();
      expect(result.molecules).toHaveLength(1);
    },
  );

  it("stand where none bears it out, and a later one that does is the same molecule", () => {
    const first = withTable([stretched, stretched]);
    // A shaken bond may be near enough for a remark.
    expect(states(first)).not.toContain("h");
    expect(first.messages.map(({ code }) => code)).toContain("S26");
    const classifier = new FrameClassifier({ group: first.group });
    expect(states(withTable([fluoro, stretched], classifier))).not.toContain("h");
  });
});

describe("the molecules that are offered", () => {
  it("are one where a charge is only left out", () => {
    const difluoroethane = molecule("CC(F)F");
    const frames = [1, 2, 3].map((k) => frameOf(difluoroethane, k, k === 1 ? { charge: 0 } : {}));
    const table = {
      bonds: Int32Array.from(difluoroethane.graph.bonds),
      orders: null,
      charges: null,
      radicals: null,
    };
    expect(classify([{ ...frames[0]!, table }, frames[1]!, frames[2]!]).molecules).toHaveLength(1);
    const charged = classify([frames[0]!, frames[1]!, { ...frames[2]!, charge: 1 }]);
    expect(charged.molecules.map(({ charge, frames: n }) => [charge, n])).toEqual([
      [0, 2],
      [1, 1],
    ]);
  });

  it("say in what they differ where formula and charge are the same", () => {
    const [one, other] = [molecule("CC(F)F"), molecule("FCCF")];
    const broken = { ...one, positions: one.positions.slice() };
    const hydrogen = one.graph.elements.lastIndexOf(1);
    broken.positions[3 * hydrogen]! += 4;
    const { molecules } = classify(
      [1, 2].map((k) => frameOf(one, k)).concat(frameOf(broken, 3), frameOf(other, 4)),
    );
    const words = molecules.map(({ difference }) => difference);
    expect(words[0]).toBe("bonds as in frame 1");
    expect(words[1]).toMatch(/^against frame 1, bond .*–H\d+ is gone/);
    expect(words[2]).toContain("frame 1");
    expect(new Set(words).size).toBe(3);
  });

  it("count dummy atoms in what they are called", () => {
    const water = molecule("O");
    const ghost: ClassifierFrame = {
      ...frameOf(water, 3),
      elements: Uint8Array.of(...water.graph.elements, 0),
      isotopes: null,
      positions: Float64Array.of(...water.positions, 5, 5, 5),
    };
    const { molecules } = classify([frameOf(water, 1), frameOf(water, 2), ghost]);
    expect(molecules.map(({ formula }) => formula)).toEqual(["H2O", "H2O with 1 dummy atom"]);
  });
});

describe("a second batch", () => {
  it("is compared with the group of the first, through JSON", () => {
    const [one, other] = [molecule("C[C@H](O)[C@@H](F)Cl"), molecule("C[C@H](O)[C@H](F)Cl")];
    const first = classifyMolecules([one, one]);
    const group = JSON.parse(JSON.stringify(first.group));
    const second = classify(
      [frameOf(other, 3), frameOf(other, 4), frameOf(one, 5), frameOf(molecule("CCO"), 6)],
      new FrameClassifier({ group }),
    );
    expect(states(second)).toBe("hhah");
    expect(second).toMatchObject({ formula: first.formula, shape: 0, group });
    const strangers = classify([frameOf(molecule("CCO"), 3)], new FrameClassifier({ group }));
    expect([states(strangers), strangers.shape]).toEqual(["h", null]);
  });

  it("keeps double bonds apart from the first batch on", () => {
    const first = classifyMolecules([molecule("C/C=C/C")]);
    const second = classify([frameOf(molecule("C/C=C\\C"), 2)], new FrameClassifier({ group: first.group }));
    expect(states(second)).toBe("h");
  });

  it("preferred frames decide alone where a person picks another group", () => {
    const [ethanol, propane] = [molecule("CCO"), molecule("CCC")];
    const classifier = new FrameClassifier();
    [propane, ethanol, ethanol].forEach((m, k) => {
      classifier.add(frameOf(m, k + 1));
    });
    expect(states(classifier.finish())).toBe("haa");
    expect(states(classifier.finish({ preferFrames: [1] }))).toBe("ahh");
  });
});

it("a molecule met after thousands of other bond sets is kept, its hands unknown", () => {
  const random = mulberry(7);
  const cloud = (frame: number): ClassifierFrame => ({
    frame,
    file: "a.xyz",
    line: frame,
    elements: new Uint8Array(10).fill(7),
    isotopes: null,
    positions: Float64Array.from({ length: 30 }, () => 5 * random()),
  });
  const classifier = new FrameClassifier();
  for (let f = 1; f <= 4000; f++) classifier.add(cloud(f));
  classifier.add(frameOf(molecule("C[C@H](O)F"), 4001));
  const result = classifier.finish({ preferFrames: [4001] });
  expect(result.frames[4000]!.state).toBe("remarked");
  expect(result.chirality).toBe("unsure");
});

it("another numbering of the atoms changes nothing but numbers", () => {
  const [one, other] = [molecule("OC(=O)[C@H](O)[C@@H](O)C(=O)O"), molecule("OC(=O)[C@H](O)[C@H](O)C(=O)O")];
  const n = one.graph.elements.length;
  fc.assert(
    fc.property(fc.shuffledSubarray([...Array(n).keys()], { minLength: n }), (order) => {
      const image = { ...one, positions: mirrored(one.positions) };
      const frames = [one, one, other, image, one].map((m) => renamed(m, order));
      const result = classifyMolecules(frames);
      expect(states(result)).toBe("aahha");
      expect(result.chirality).toBe("chiral");
    }),
    { seed: 20261201, numRuns: 15 },
  );
});
