import { SYMBOLS } from "./elements.ts";

const SYMBOL = new Set(SYMBOLS);
/** Runs of element symbols with counts, a charge at the end where there is one. */
const CANDIDATE = /(?<![A-Za-z0-9_])(?:[A-Z][a-z]?\d*){2,}(?![A-Za-z0-9_])/g;

/**
 * Cuts a sentence into formulas and what stands between them. A formula has two elements or more and a count; a lone
 * symbol with a number is an atom ("H14 has moved").
 *
 * @example formulaRuns("Found C3H8 here.") // "Found ", formula "C3H8", " here."
 */
export function formulaRuns(text: string): { text: string; formula: boolean }[] {
  const runs: { text: string; formula: boolean }[] = [];
  let done = 0;
  for (const { 0: found, index } of text.matchAll(CANDIDATE)) {
    const symbols = found.match(/[A-Z][a-z]?/g) ?? [];
    if (!/\d/.test(found) || !symbols.every((symbol) => SYMBOL.has(symbol))) continue;
    if (index > done) runs.push({ text: text.slice(done, index), formula: false });
    runs.push({ text: found, formula: true });
    done = index + found.length;
  }
  if (done < text.length) runs.push({ text: text.slice(done), formula: false });
  return runs;
}
