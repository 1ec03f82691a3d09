import { closeSync, existsSync, openSync, statSync, writeSync } from "node:fs";
import path from "node:path";
import { SYMBOLS } from "../../app/lib/chem/elements.ts";
import type { FrameBlock, Graph } from "../../app/lib/structure.ts";
import { molecule } from "../factories/molecule.ts";
import { graphOf, readXyz } from "../factories/read-xyz.ts";
import { EnsembleMaker, type EnsembleRecipe } from "./ensemble.ts";

/** What the benchmark runs on: made anew each time, by seeded generators, from real geometries where they are there. */

/** 84 atoms with one exchange of heavy atoms, the identity: a molecule of our own, embedded roughly. */
const LONG_CHAIN = "C[C@H](O)C1=CN=C(C=C1F)C(=O)NCCSC[C@@H](CC#N)OC(=O)NCCOC[C@H](C)CCSC[C@@H](C)OCOC";
/** 82,944 exchanges with hydrogens: two dimethylamino groups (72 each), three CH2 and a ring that flips. */
const DIAMINE = "CN(C)CCC1=CC=C(CN(C)C)C=C1";

export interface Molecule {
  name: string;
  graph: Graph;
  block: FrameBlock;
}

export interface Made {
  /** What it is, for the table. */
  what: string;
  file: string;
  bytes: number;
  frames: number;
}

/** Places of the checkout, and of files that last as long as the benchmark. */
export interface Places {
  root: string;
  scratch: string;
}

/** The hard molecule of the reference data, or the best that the fixtures have. */
export function symmetricMolecule({ root }: Places): Molecule {
  const beside = path.join(root, "../shared/reference/large/M.xyz.gz");
  if (existsSync(beside)) return load("M", beside);
  return load("aryl-ether", fixture(root, "aryl-ether"));
}

export function fixtureMolecule({ root }: Places, name: string): Molecule {
  return load(name, fixture(root, name));
}

function fixture(root: string, name: string): string {
  return path.join(root, `fixtures/reference/ensembles/${name}.xyz`);
}

function load(name: string, file: string): Molecule {
  const frames = readXyz(file);
  return { name, graph: graphOf(frames), block: frames.block };
}

export function diamine(): Molecule {
  const recipe = { seed: 3, frames: 400, minima: 300, geometries: 200, span: 5, turn: 0.02 };
  const maker = new EnsembleMaker(graphOfSmiles(DIAMINE), embedded(DIAMINE, 3), recipe);
  const frames = [...maker.frames()].map(({ positions }) => positions);
  const atoms = maker.graph.elements.length;
  const positions = new Float64Array(3 * atoms * frames.length);
  frames.forEach((frame, k) => {
    positions.set(frame, 3 * atoms * k);
  });
  return {
    name: "bis(dimethylamine)",
    graph: maker.graph,
    block: { atoms, count: frames.length, positions },
  };
}

/** 10,000 frames of the hard molecule: about 4,000 minima, 3,000 of them of a shape of their own. */
export function makeSymmetric(places: Places, base: Molecule, frames: number): Made {
  const { graph, block } = base;
  const stride = 3 * block.atoms;
  const bases = Array.from({ length: block.count }, (_, k) =>
    block.positions.subarray(k * stride, (k + 1) * stride),
  );
  const recipe = {
    seed: 1,
    frames,
    minima: Math.round(0.44 * frames),
    geometries: Math.round(0.39 * frames),
    span: 14,
    turn: 0.02,
  };
  return write(places, base.name, new EnsembleMaker(graph, bases, recipe), recipe);
}

/** 50,000 frames of the long chain. */
export function makeLong(places: Places, frames: number): Made {
  const graph = graphOfSmiles(LONG_CHAIN);
  const recipe = {
    seed: 2,
    frames,
    minima: Math.round(0.4 * frames),
    geometries: Math.round(0.38 * frames),
    span: 26,
    turn: 0.004,
  };
  return write(places, "long chain", new EnsembleMaker(graph, embedded(LONG_CHAIN, 6), recipe), recipe);
}

function graphOfSmiles(smiles: string): Graph {
  return molecule(smiles).graph;
}

function embedded(smiles: string, count: number): Float64Array[] {
  return Array.from({ length: count }, (_, k) => molecule(smiles, k + 1).positions);
}

/** As the reference data have it: the energy in hartree alone in the comment, ten decimals. */
function write({ scratch }: Places, name: string, maker: EnsembleMaker, recipe: EnsembleRecipe): Made {
  const file = path.join(scratch, `${name.replace(/\W+/g, "-")}-${recipe.frames}.xyz`);
  const symbols = Array.from(maker.graph.elements, (z) => ` ${SYMBOLS[z]}`.padEnd(4));
  const out = openSync(file, "w");
  for (const { positions, energy } of maker.frames()) {
    let text = `${symbols.length}\n        ${energy.toFixed(10)}\n`;
    symbols.forEach((symbol, a) => {
      text += symbol;
      for (let c = 0; c < 3; c++) text += positions[3 * a + c]!.toFixed(10).padStart(16);
      text += "\n";
    });
    writeSync(out, text);
  }
  closeSync(out);
  const what = `${name}, ${recipe.frames.toLocaleString("en-GB")} x ${symbols.length}`;
  return { what, file, bytes: statSync(file).size, frames: recipe.frames };
}
