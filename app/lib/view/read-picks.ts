import { atomName, symbolOf } from "../chem/elements.ts";
import { MAX_PICKED } from "../url-state.ts";

export type ReadPicks = { ok: true; atoms: number[] } | { ok: false; message: string };

/**
 * Atoms as people type them: names or numbers, in the order of the measure, parted by blanks, commas or dashes.
 *
 * @returns atoms from 0, each once, up to four; or what would be right
 * @example readPicks("C3 C4 N5 S6", [6, 6, 6, 6, 7, 16]) // atoms 2, 3, 4, 5
 */
export function readPicks(text: string, elements: ArrayLike<number>): ReadPicks {
  const words = text.split(/[\s,;/\u2013\u2212-]+/).filter((word) => word !== "");
  const atoms: number[] = [];
  for (const word of words) {
    const found = /^([A-Za-z]{0,2})(\d{1,6})$/.exec(word);
    const atom = Number(found?.[2] ?? 0) - 1;
    if (!found || atom < 0 || atom >= elements.length) return { ok: false, message: unknown(word, elements) };
    const symbol = symbolOf(elements[atom]!);
    if (found[1] !== "" && found[1]!.toLowerCase() !== symbol.toLowerCase()) {
      return { ok: false, message: `Atom ${atom + 1} is ${atomName(elements, atom)}, not ${word}.` };
    }
    if (!atoms.includes(atom)) atoms.push(atom);
  }
  if (atoms.length > MAX_PICKED) {
    return {
      ok: false,
      message: `Two atoms measure a distance, three an angle, four a torsion; these are ${atoms.length}.`,
    };
  }
  return { ok: true, atoms };
}

function unknown(word: string, elements: ArrayLike<number>): string {
  if (elements.length === 0) return `No atom is called \u201c${word}\u201d.`;
  const last = elements.length - 1;
  return `No atom is called \u201c${word}\u201d. They run from ${atomName(elements, 0)} to ${atomName(elements, last)}.`;
}

/**
 * Picks one atom more, or takes a picked one out. A fifth begins a new pick.
 *
 * @example togglePick([2, 3], 3) // [2]
 */
export function togglePick(picked: readonly number[], atom: number): number[] {
  if (picked.includes(atom)) return picked.filter((other) => other !== atom);
  return picked.length >= MAX_PICKED ? [atom] : [...picked, atom];
}
