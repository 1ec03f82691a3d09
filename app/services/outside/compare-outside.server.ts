import { setImmediate as breathe } from "node:timers/promises";
import { eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembles } from "../../db/schema.server.ts";
import type { OutsideChoice } from "../../lib/outside/choice.ts";
import {
  compareTorsions,
  mainTorsions,
  type Nearness,
  OutsideComparer,
  smallerSet,
} from "../../lib/outside/compare-outside.ts";
import { inEnsembleOrder } from "../../lib/outside/ensemble-order.ts";
import { nearestRows } from "../../lib/outside/finding.ts";
import type { SiftRecipe } from "../../lib/recipe/recipe.ts";
import type { KeptConformer, SiftResult } from "../../lib/recipe/result.ts";
import type { AtomSet, Graph } from "../../lib/structure.ts";
import { frameIndices } from "../ensembles/frame-indices.server.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { notFound } from "../http.server.ts";
import type { OutsideData } from "./outside-data.ts";

/** Conformers that are compared, from the lowest on. */
export const MOST_COMPARED = 5000;
/** Rows for which the torsions are handed out: as many as the table shows at most. */
export const MOST_FITTED = 100;
/** Frames loaded and compared in one go: short enough for other requests to get their turn. */
const SLICE = 50;
/** Nodes that one comparison may cost, and all of them together; behind that each has but a few, and says so. */
const NODE_LIMIT = 20_000;
const NODE_BUDGET = 10_000_000;
const FEW_NODES = 50;
/** Comparisons that are kept, since neither a sift nor a structure ever changes. */
const MOST_KEPT = 24;

/** A structure from outside against the conformers of one sift, as plain data. */
export interface OutsideComparison {
  outsideId: string;
  siftId: string;
  /** Atoms compared: no more than the structure shows. */
  set: AtomSet;
  /** By position in the distinct set, Å. */
  rmsd: number[];
  mirrorRmsd: number[];
  exact: number[];
  /** Main torsions of the nearest conformers beside those of the structure, nearest first. */
  fits: {
    frame: number;
    torsions: { outside: number | null; conformer: number | null; apart: number | null }[];
  }[];
  /** Atoms from 0 at which the structure is another stereoisomer. */
  otherConfiguration: number[];
  /** Frame that is kept beside the nearest conformer as its mirror image; null where there is none, or nobody asked. */
  otherHand: number | null;
}

interface Molecule {
  ensembleId: string;
  graph: Graph;
  atoms: number;
  version: number;
}

async function moleculeOf(ensembleId: string): Promise<Molecule & { chirality: string }> {
  const rows = await db
    .select({
      atoms: ensembles.atoms,
      elements: ensembles.elements,
      bonds: ensembles.bonds,
      chirality: ensembles.chirality,
      version: ensembles.version,
    })
    .from(ensembles)
    .where(eq(ensembles.id, ensembleId));
  const row = rows[0];
  if (row === undefined) throw notFound();
  const { atoms, chirality, version } = row;
  return { ensembleId, graph: unpackMolecule(row), atoms, chirality, version };
}

async function positionsOf({ ensembleId, atoms }: Molecule, frames: number[]): Promise<Float64Array> {
  return loadPositions(ensembleId, atoms, await frameIndices(db, ensembleId, frames));
}

async function compareAll(
  molecule: Molecule,
  comparer: OutsideComparer,
  frames: number[],
): Promise<Nearness> {
  const { atoms } = molecule;
  const all: Nearness = {
    rmsd: new Float64Array(frames.length),
    mirrorRmsd: new Float64Array(frames.length),
    exact: new Uint8Array(frames.length),
  };
  const positions = await positionsOf(molecule, frames);
  comparer.limitNodes(NODE_LIMIT);
  for (let at = 0; at < frames.length; at += SLICE) {
    const count = Math.min(SLICE, frames.length - at);
    const block = { atoms, count, positions: positions.subarray(3 * atoms * at, 3 * atoms * (at + count)) };
    const found = comparer.compare(block);
    all.rmsd.set(found.rmsd, at);
    all.mirrorRmsd.set(found.mirrorRmsd, at);
    all.exact.set(found.exact, at);
    if (comparer.nodes > NODE_BUDGET) comparer.limitNodes(FEW_NODES);
    await breathe();
  }
  return all;
}

const kept = new Map<string, Promise<Nearness>>();

/** The same comparison once, however many ask at the same time; one that failed is not kept. */
function nearnessOnce(key: string, compute: () => Promise<Nearness>): Promise<Nearness> {
  const known = kept.get(key);
  if (known) return known;
  const made = compute();
  kept.set(key, made);
  made.catch(() => kept.delete(key));
  for (const oldest of kept.keys()) {
    if (kept.size <= MOST_KEPT) break;
    kept.delete(oldest);
  }
  return made;
}

/**
 * Compares a structure from outside with the distinct set of a sift; access has been decided before.
 *
 * @returns null where the molecule was read again since in another way, so that the structure's mapping no longer fits
 */
export async function compareOutside(options: {
  ensembleId: string;
  outside: { id: string; data: OutsideData };
  /** With its recipe the mirror image of the nearest conformer is looked for. */
  sift: { id: string; result: Pick<SiftResult, "kept">; recipe?: SiftRecipe };
  choice: Pick<OutsideChoice, "set" | "mirror">;
}): Promise<OutsideComparison | null> {
  const { outside, sift, choice } = options;
  const { data } = outside;
  const molecule = await moleculeOf(options.ensembleId);
  const { graph } = molecule;
  if (!fits(graph, data)) return null;
  const set = smallerSet(choice.set, data.atoms);
  const comparer = new OutsideComparer(graph, { positions: inEnsembleOrder(data), atoms: data.atoms }, set);
  const frames = sift.result.kept.slice(0, MOST_COMPARED).map(({ frame }) => frame);
  const key = `${outside.id} ${sift.id} ${set} ${molecule.version}`;
  const found = await nearnessOnce(key, () => compareAll(molecule, comparer, frames));
  const countMirror = choice.mirror && molecule.chirality === "achiral";
  const rows = frames.map((frame, index) => ({
    index,
    name: "",
    frame,
    relativeEnergy: null,
    population: null,
  }));
  const near = nearestRows(rows, found, countMirror).slice(0, MOST_FITTED);
  const positions = await positionsOf(
    molecule,
    near.map(({ frame }) => frame),
  );
  const torsions = mainTorsions(graph);
  comparer.limitNodes(NODE_LIMIT);
  const conformers = near.map((_, k) =>
    positions.subarray(3 * molecule.atoms * k, 3 * molecule.atoms * (k + 1)),
  );
  const [nearest] = conformers;
  const { recipe } = sift;
  const otherHand =
    recipe?.mirror === "keep" && countMirror && nearest !== undefined
      ? await keptImage(molecule, { frame: near[0]?.frame ?? 0, positions: nearest }, sift, recipe)
      : null;
  return {
    outsideId: outside.id,
    siftId: sift.id,
    set,
    rmsd: [...found.rmsd],
    mirrorRmsd: [...found.mirrorRmsd],
    exact: [...found.exact],
    fits: near.map(({ frame, mirror }, k) => {
      const conformer = conformers[k] ?? new Float64Array(3 * molecule.atoms);
      const apart = compareTorsions(torsions, conformer, comparer.fit(conformer, mirror), mirror);
      return { frame, torsions: apart.map(({ atoms: _, ...angles }) => angles) };
    }),
    otherConfiguration:
      nearest === undefined ? [] : comparer.otherConfiguration(nearest, comparer.fit(nearest, false)),
    otherHand,
  };
}

/**
 * The kept frame that is the mirror image of another one by the rule of the sift: within its tolerances, over its atoms.
 * None for a shape that is its own mirror image.
 */
async function keptImage(
  molecule: Molecule,
  of: { frame: number; positions: Float64Array },
  sift: { id: string; result: Pick<SiftResult, "kept"> },
  recipe: SiftRecipe,
): Promise<number | null> {
  const { rmsdTolerance, energyTolerance, atoms } = recipe;
  const compared = sift.result.kept.slice(0, MOST_COMPARED);
  const own = compared.find(({ frame }) => frame === of.frame);
  if (own === undefined || own.mirrorRmsd <= rmsdTolerance) return null;
  const alike = ({ relativeEnergy }: KeptConformer) =>
    energyTolerance === null ||
    relativeEnergy === null ||
    own.relativeEnergy === null ||
    Math.abs(relativeEnergy - own.relativeEnergy) <= energyTolerance;
  const frames = compared.filter((one) => one !== own && alike(one)).map(({ frame }) => frame);
  const comparer = new OutsideComparer(molecule.graph, { positions: of.positions, atoms: "all" }, atoms);
  const key = `${sift.id} ${of.frame} image ${molecule.version}`;
  const { mirrorRmsd } = await nearnessOnce(key, () => compareAll(molecule, comparer, frames));
  let best = -1;
  mirrorRmsd.forEach((rmsd, k) => {
    if (rmsd <= rmsdTolerance && (best < 0 || rmsd < (mirrorRmsd[best] ?? 0))) best = k;
  });
  return frames[best] ?? null;
}

/** The mapping was made for this molecule. */
function fits(graph: Graph, { map, elements }: OutsideData): boolean {
  return (
    map.length === graph.elements.length &&
    map.every((from, atom) => from < 0 || elements[from] === graph.elements[atom])
  );
}
