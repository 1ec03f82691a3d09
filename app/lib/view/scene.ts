import { depthStep } from "../format.ts";
import { isPolarHydrogen, makeGraph, selectAtoms } from "../structure.ts";
import type { HydrogenMode, ViewMode } from "../url-state.ts";
import { type BondChange, bondChange } from "./bond-change.ts";
import { createPlacer, type Placer, type Positions } from "./placer.ts";

/**
 * What the 3D view shows, worked out without drawing it: which conformers stand in atom colours and which in their
 * depth tint, laid over one another, with which atoms and bonds. The canvas, the still picture and the words for
 * readers without either come from this.
 */

export interface ViewConformer {
  frame: number;
  /** "c1"; without it the frame number names the conformer. */
  name?: string;
  /** Packed x, y, z, Å. */
  positions: Positions;
  /** Fraction; null where populations are not known. */
  population: number | null;
  selected: boolean;
  /** Flat pairs from 0 where they differ from the group's. */
  bonds?: number[];
  /** "outside": no conformer of the ensemble; it has no frame. */
  tone?: "held" | "outside";
}

export interface SceneInput {
  elements: readonly number[];
  /** Flat pairs from 0, of the group. */
  bonds: readonly number[];
  conformers: readonly ViewConformer[];
  /** Atoms from 0; null or fewer than three: the heavy atoms. */
  alignOn: readonly number[] | null;
  hydrogens: HydrogenMode;
  mode: ViewMode;
  /** Atoms that are drawn whatever is hidden: picked hydrogens. */
  always?: readonly number[];
}

/** Step of the depth tint. */
export type DepthStep = ReturnType<typeof depthStep>;

/** One conformer as it is drawn. */
export interface Figure {
  /** Position in the input. */
  index: number;
  frame: number;
  name: string;
  population: number | null;
  /** Null where the population is not known. */
  step: DepthStep | null;
  held: boolean;
  outside: boolean;
  /** Laid over the reference; Å. */
  positions: Float64Array;
  /** Bonds of its own between shown atoms, flat pairs. */
  bonds: Int32Array;
  change: BondChange | null;
}

export interface Scene {
  elements: readonly number[];
  mode: ViewMode;
  /** Atoms that are drawn, ascending. */
  shown: Int32Array;
  /** In atom colours, at most four, in the order of the input; the first is the reference. */
  strong: Figure[];
  /** In their depth tint, weakest first, as they are painted. */
  faint: Figure[];
  /** Selected conformers that found no room among the four. */
  selectedBeyond: number;
}

/** Exchanges of equivalent atoms tried for all conformers together, and for one: about 0.1 s. */
const TRIES = 4000;
const MOST_TRIES = 64;

/** More structures in atom colours over one another can no longer be told apart. */
export const MOST_STRONG = 4;

/**
 * Works out a scene. The reference is the first selected conformer, else the most populated one; it is itself laid over
 * the anchor, so that choosing another reference does not turn the picture.
 *
 * @param options.place keep one over the life of a view: it remembers what it has laid over what
 * @param options.anchor any conformer's coordinates, the same over the life of a view; the first of the list when absent
 * @returns no figures for no conformers
 * @throws RangeError where a conformer has another number of coordinates than the elements ask for
 */
export function buildScene(
  input: SceneInput,
  options: { place?: Placer; anchor?: Positions | null } = {},
): Scene {
  const { elements, conformers, mode } = input;
  const place = options.place ?? createPlacer();
  const graph = makeGraph(Uint8Array.from(elements), input.bonds);
  for (const { frame, positions } of conformers) {
    if (positions.length !== 3 * elements.length) {
      throw new RangeError(
        `Frame ${frame} has ${positions.length} coordinates where ${elements.length} atoms ask for ${3 * elements.length}.`,
      );
    }
  }
  const selected = indices(conformers).filter((k) => conformers[k]!.selected);
  const ranked = [...indices(conformers)].sort(
    (a, b) => rank(conformers[b]!) - rank(conformers[a]!) || a - b,
  );
  const chosen = chosenOf(selected, ranked, mode);
  const strongIndices = chosen.slice(0, mode === "one" ? 1 : MOST_STRONG);
  const faintIndices = mode === "overlay" ? ranked.filter((k) => !strongIndices.includes(k)).reverse() : [];

  const heavy = selectAtoms(graph, "heavy");
  const atoms = input.alignOn && input.alignOn.length >= 3 ? Int32Array.from(input.alignOn) : heavy;
  const changes = new Map<number, BondChange>();
  for (const k of [...strongIndices, ...faintIndices]) {
    const own = conformers[k]!.bonds;
    const change = own ? bondChange(elements, input.bonds, own) : null;
    if (change) changes.set(k, change);
  }
  // A hydrogen that changed its partner is the point of the picture, whatever is hidden.
  const moved = strongIndices.flatMap((k) => changes.get(k)?.moved ?? []);
  const shown = shownAtoms(graph, input.hydrogens, [...moved, ...(input.always ?? [])]);
  const common = visibleBonds(input.bonds, shown, elements.length);
  const tries = Math.min(MOST_TRIES, Math.ceil(TRIES / conformers.length));
  const figure = (k: number): Figure => {
    const conformer = conformers[k]!;
    const change = changes.get(k) ?? null;
    return {
      index: k,
      frame: conformer.frame,
      name: conformer.name ?? `frame ${conformer.frame}`,
      population: conformer.population,
      step: conformer.population === null ? null : depthStep(conformer.population),
      held: conformer.tone === "held",
      outside: conformer.tone === "outside",
      positions: place({
        graph,
        anchor: options.anchor ?? conformers[0]!.positions,
        reference: conformers[strongIndices[0]!]!.positions,
        moved: conformer.positions,
        atoms,
        tries,
      }),
      bonds: change && conformer.bonds ? visibleBonds(conformer.bonds, shown, elements.length) : common,
      change,
    };
  };
  return {
    elements,
    mode,
    shown,
    strong: strongIndices.map(figure),
    faint: faintIndices.map(figure),
    selectedBeyond: selected.length > strongIndices.length ? selected.length - strongIndices.length : 0,
  };
}

/** The selected ones; side by side with nothing to stand beside, the most populated fill up. */
function chosenOf(selected: readonly number[], ranked: readonly number[], mode: ViewMode): readonly number[] {
  if (mode === "side" && selected.length < 2) {
    return [...selected, ...ranked.filter((k) => !selected.includes(k))].slice(0, MOST_STRONG);
  }
  return selected.length > 0 ? selected : ranked.slice(0, 1);
}

function indices(list: readonly unknown[]): number[] {
  return Array.from(list.keys());
}

/** Unknown populations rank below any known one. */
function rank(conformer: ViewConformer): number {
  return conformer.population ?? -1;
}

function shownAtoms(
  graph: ReturnType<typeof makeGraph>,
  hydrogens: HydrogenMode,
  always: readonly number[],
): Int32Array {
  const onlyHydrogen = graph.elements.every((z) => z <= 1);
  const shown: number[] = [];
  for (let atom = 0; atom < graph.elements.length; atom++) {
    const hidden =
      graph.elements[atom] === 1 &&
      !onlyHydrogen &&
      hydrogens !== "all" &&
      !(hydrogens === "polar" && isPolarHydrogen(graph, atom));
    if (!hidden || always.includes(atom)) shown.push(atom);
  }
  return Int32Array.from(shown);
}

function visibleBonds(bonds: readonly number[], shown: Int32Array, atoms: number): Int32Array {
  const visible = new Uint8Array(atoms);
  for (const atom of shown) visible[atom] = 1;
  const kept: number[] = [];
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    if (visible[bonds[k]!] && visible[bonds[k + 1]!]) kept.push(bonds[k]!, bonds[k + 1]!);
  }
  return Int32Array.from(kept);
}
