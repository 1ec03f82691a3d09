import { symbolOf } from "../chem/elements.ts";
import type { OpenReading, ReadingChoices } from "../intake/reading-choices.ts";
import { AS_PROPOSED } from "../intake/reading-choices.ts";
import { type AtomLine, readAtomLine } from "./atom-line.ts";
import type { Layout } from "./layout.ts";
import { readSpecies } from "./species.ts";

/** An atom line of which something was open, and how it was read. */
export interface OpenLine {
  readonly result: Extract<AtomLine, { kind: "atom" }>;
  readonly open: readonly Omit<OpenReading, "line">[];
  /** Both readings of a name in capitals: the two-letter element, and the one-letter one that was taken. */
  readonly capitals: { readonly two: number; readonly one: number; readonly token: string } | null;
}

type Open = Omit<OpenReading, "line">;

/** Characters of a line that a preview shows. */
const SHOWN = 18;

const may = (choices: ReadingChoices, ask: keyof ReadingChoices, ...options: string[]) =>
  [AS_PROPOSED, ...options].includes(choices[ask] ?? "");

/**
 * Reads an atom line that cannot be read as it stands, where the choices say how: with decimal commas (row X22), behind
 * an index (X26), with a name in capitals that has two readings (X16).
 *
 * @param position takes x, y and z
 * @param atom number of the atom from 0, which an index must count
 * @returns null where the choices do not help
 */
export function readOpenLine(
  line: string,
  layout: Layout,
  position: Float64Array,
  atom: number,
  choices: ReadingChoices,
): OpenLine | null {
  let text = line;
  let capitals: OpenLine["capitals"] = null;
  const open: Open[] = [];
  for (let step = 0; step < 4; step++) {
    const result = readAtomLine(text, layout, position, 0);
    if (result.kind === "atom") {
      if (capitals) result.atom.label ??= capitals.token;
      return { result, open, capitals };
    }
    const code = result.kind === "fault" ? result.fault.code : null;
    const pointed = may(choices, "decimal-comma", "comma") && code !== "X16" ? withPoints(text) : null;
    if (pointed !== null) {
      open.push({ ask: "decimal-comma", proposed: "comma", shown: pointed.shown });
      text = pointed.text;
    } else if (code === "X26" && may(choices, "index-column", "index")) {
      const rest = withoutIndex(text, atom);
      if (rest === null) return null;
      open.push({ ask: "index-column", proposed: "index", shown: { index: cut(rest), hold: cut(text) } });
      text = rest;
    } else if (code === "X16" && result.kind === "fault" && may(choices, "capitals", "label", "element")) {
      const { found = "", column = 1 } = result.fault;
      const parsed = readSpecies(found);
      if (parsed.kind !== "ambiguous") return null;
      const [two, one] = parsed.readings;
      capitals = { two, one, token: found };
      text = text.slice(0, column - 1) + symbolOf(one) + text.slice(column - 1 + found.length);
    } else return null;
  }
  return null;
}

const cut = (text: string) => text.trim().replace(/\s+/g, " ").slice(0, SHOWN);

/** The line with decimal points; null where no comma is one, or points stand beside them. */
function withPoints(text: string): { text: string; shown: Record<string, string> } | null {
  if (!text.includes(",")) return null;
  let first: string | null = null;
  const pointed = text.replace(/\S+/g, (token) => {
    if (!/^[+-]?\d*,\d+(?:[eEdD][+-]?\d+)?$/.test(token)) return token;
    first ??= token;
    return token.replace(",", ".");
  });
  const points = text.split(/\s+/).some((token) => /^[+-]?\d*\.\d*/.test(token) && /\d/.test(token));
  if (first === null || points || pointed.includes(",")) return null;
  const written: string = first;
  return { text: pointed, shown: { comma: written.replace(",", "."), hold: written } };
}

/** The line without the index before it; null where that does not count the atoms, from 0 or 1. */
function withoutIndex(text: string, atom: number): string | null {
  const parts = /^\s*(\d+)\s+(.*)$/.exec(text);
  const index = Number(parts?.[1] ?? -1);
  return index === atom || index === atom + 1 ? (parts?.[2] ?? null) : null;
}
