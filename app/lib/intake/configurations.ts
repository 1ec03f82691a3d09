import type { StereoUnit } from "../chem/refine.ts";
import type { ConfigurationComparer } from "../chem/stereo.ts";
import type { Graph } from "../structure.ts";
import { arrangementWords } from "./configuration-words.ts";

/** One configuration of several in which the files hold the molecule (row S23). */
export interface ConfigurationChoice {
  /** Numbers of its first frames, by the first of which it is chosen. */
  readonly first: readonly number[];
  readonly frames: number;
  /** What tells it from the others, as a title. */
  readonly words: string;
}

/** Frames of one configuration. */
export interface ConfigurationClass {
  /** Signs of the group's units; full ones where any frame has them. */
  readonly signs: Int8Array;
  readonly frames: number[];
}

/** So many configurations are told apart; more of them are no choice. */
const MOST_CLASSES = 50;
/** So many frames of one are named. */
const NAMED = 4;

/**
 * Sorts frames by their configuration: the group's own first, then by the number of frames; of equal ones that met first.
 * Frames in which it cannot be told belong to the first that they fit, the group's before others.
 *
 * @param own signs of the group
 * @param found signs of the group's units as frames have them, each with its frames in order
 */
export function configurationClasses(
  comparer: ConfigurationComparer,
  own: Int8Array,
  found: readonly { readonly signs: Int8Array; readonly frames: readonly number[] }[],
): ConfigurationClass[] {
  const mine: ConfigurationClass = { signs: own, frames: [] };
  const classes = [mine];
  // Comparing is dear: patterns without a flat centre are compared with those of the same invariant only.
  const keys = new Map<ConfigurationClass, string | null>();
  const keyOf = (signs: Int8Array) => (signs.includes(0) ? null : comparer.invariant(signs));
  keys.set(mine, keyOf(own));
  const open = (signs: Int8Array) => signs.reduce((sum, sign) => sum + Number(sign === 0), 0);
  const inOrder = [...found].sort((a, b) => open(a.signs) - open(b.signs) || a.frames[0]! - b.frames[0]!);
  for (const { signs, frames } of inOrder) {
    const key = keyOf(signs);
    const known = classes.find((one) => {
      const other = keys.get(one) ?? null;
      return (key === null || other === null || key === other) && comparer.same(one.signs, signs);
    });
    if (known) {
      for (const frame of frames) known.frames.push(frame);
    } else if (classes.length < MOST_CLASSES) {
      const fresh = { signs, frames: [...frames] };
      classes.push(fresh);
      keys.set(fresh, key);
    }
  }
  for (const { frames } of classes) frames.sort((a, b) => a - b);
  const others = classes
    .slice(1)
    .sort((a, b) => b.frames.length - a.frames.length || a.frames[0]! - b.frames[0]!);
  return [mine, ...others];
}

/**
 * The same as a choice, in words: R, S, E and Z where the atoms next to a unit decide them.
 *
 * @param against what differs between the first class and each of the others: units, and a sentence
 * @returns none where all frames are of one configuration
 */
export function configurationChoices(
  graph: Graph,
  units: readonly StereoUnit[],
  classes: readonly ConfigurationClass[],
  against: (signs: Int8Array) => { units: readonly number[]; message: string },
): ConfigurationChoice[] {
  const [own, ...others] = classes.filter(({ frames }) => frames.length > 0);
  if (own === undefined || others.length === 0) return [];
  const differences = others.map(({ signs }) => against(signs));
  const differing = [...new Set(differences.flatMap((difference) => difference.units))].sort((a, b) => a - b);
  const labels = (signs: Int8Array): string | null => {
    const parts = differing.map((u) =>
      signs[u] === 0 ? null : arrangementWords(graph, units[u]!, signs[u]!),
    );
    return parts.length > NAMED || parts.includes(null) ? null : parts.join(", ");
  };
  const named = [own, ...others].map(({ signs }) => labels(signs));
  // Letters only where they tell all of them apart.
  const sure = !named.includes(null) && new Set(named).size === named.length;
  const reference = `As in frame ${own.frames[0]}`;
  return [own, ...others].map(({ frames }, k) => ({
    first: frames.slice(0, NAMED),
    frames: frames.length,
    words: sure
      ? (named[k] ?? "")
      : k === 0
        ? reference
        : (differences[k - 1]?.message.replace(/\.$/, "") ?? ""),
  }));
}
