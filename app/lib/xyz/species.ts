import { type ParsedElement, parseElement } from "../chem/elements.ts";

/** Readings by token: files repeat a handful. Emptied when odd files fill it. */
const known = new Map<string, ParsedElement>();

/** As `parseElement`, remembered. */
export function readSpecies(token: string): ParsedElement {
  const found = known.get(token);
  if (found) return found;
  if (known.size >= 4096) known.clear();
  const parsed = parseElement(token);
  known.set(token, parsed);
  return parsed;
}
