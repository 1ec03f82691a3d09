import type { EnergyUnit } from "../units.ts";
import { parseEnergyUnit } from "./energy-units.ts";
import { numberLength, parseQuantity, plainBlanksAndMinus } from "./numbers.ts";

/** One number of a comment line. */
export interface CommentNumber {
  /** Counts every number of the line from 1, whole ones too. */
  readonly position: number;
  readonly text: string;
  /** Null for a number beyond what can be stored, such as `1e400`. */
  readonly value: number | null;
  /** The unbroken run of characters before `=` or `:`, or null. */
  readonly key: string | null;
  /** Words before it back to the number before, the nearest last, without the key; at most four. */
  readonly words: readonly string[];
  /** Unit word right behind it, or glued to it. */
  readonly unit: EnergyUnit | null;
  /** The word behind it, whatever it means; empty where none is. */
  readonly next: string;
  /** Its key is given a value twice, by "=": the last one counts (row X33). */
  readonly repeated: boolean;
  /** One of several in brackets or quotes: never an energy of the frame. */
  readonly inArray: boolean;
}

/** What stands behind a key: a number, or text that is none. */
export interface KeyedText {
  readonly text: string;
  readonly number: CommentNumber | null;
}

export interface ScannedComment {
  readonly numbers: readonly CommentNumber[];
  /** By key; of a key written twice the last. */
  readonly keyed: ReadonlyMap<string, KeyedText>;
  /** Nothing but one number stands there. */
  readonly bare: boolean;
}

type Token = { readonly kind: "word" | "quoted" | "array" | "sign"; readonly text: string };

const isBlank = (code: number) => code === 32 || code === 9 || code === 11 || code === 12;

/**
 * Finds the numbers and keys of a comment line, be it plain text or extended. A number is one only as a whole word
 * (brackets and closing punctuation aside, a unit glued to it allowed): `MMFF94`, `conf_0001`, dates and times hold none.
 *
 * @example scanComment("conformer 17  MMFF94  E = 35.12 kcal/mol").numbers // 17, and 35.12 with key "E"
 */
export function scanComment(comment: string): ScannedComment {
  const tokens = tokenise(plainBlanksAndMinus(comment));
  const numbers: CommentNumber[] = [];
  const keyed = new Map<string, KeyedText>();
  const twice = assignedTwice(tokens);
  let words: string[] = [];
  tokens.forEach((token, at) => {
    if (token.kind === "sign") return;
    const key = keyBefore(tokens, at);
    const context = {
      key,
      words: key === null ? words : words.slice(0, -1),
      behind: wordsBehind(tokens, at),
      repeated: key !== null && twice.has(key),
    };
    const found = numbersOf(token, numbers.length, context);
    // One by one: an array in a comment may be longer than a call takes arguments.
    for (const number of found) numbers.push(number);
    if (key !== null) keyed.set(key, { text: token.text, number: found.length === 1 ? found[0]! : null });
    words = found.length > 0 ? [] : [...words.slice(-4), token.text];
  });
  return { numbers, keyed, bare: tokens.length === 1 && numbers.length === 1 };
}

/** Keys that stand before "=" more than once. */
function assignedTwice(tokens: readonly Token[]): ReadonlySet<string> {
  const seen = new Set<string>();
  const twice = new Set<string>();
  for (let at = 2; at < tokens.length; at++) {
    if (tokens[at - 1]!.text !== "=" || tokens[at - 1]!.kind !== "sign") continue;
    const key = keyBefore(tokens, at);
    if (key === null) continue;
    if (seen.has(key)) twice.add(key);
    seen.add(key);
  }
  return twice;
}

function tokenise(text: string): Token[] {
  const tokens: Token[] = [];
  let at = 0;
  // A quote or bracket that found no end makes those behind it hopeless too: look once, so that time stays linear.
  const open = { '"': true, "[": true, "{": true };
  while (at < text.length) {
    const c = text[at]!;
    if (isBlank(text.charCodeAt(at))) at += 1;
    else if (c === "=") {
      tokens.push({ kind: "sign", text: "=" });
      at += 1;
    } else {
      const enclosed = c === '"' || c === "[" || c === "{" ? readEnclosed(text, at, c, open, tokens) : null;
      at = enclosed ?? readWord(text, at, tokens);
    }
  }
  return tokens;
}

function readEnclosed(
  text: string,
  at: number,
  c: '"' | "[" | "{",
  open: Record<'"' | "[" | "{", boolean>,
  tokens: Token[],
): number | null {
  const isValue = tokens.at(-1)?.text === "=";
  if (!open[c] || (c !== '"' && !isValue)) return null;
  const end = closing(text, at, c);
  if (end < 0) {
    open[c] = false;
    return null;
  }
  tokens.push({ kind: c === '"' ? "quoted" : "array", text: text.slice(at + 1, end) });
  return end + 1;
}

function closing(text: string, from: number, c: '"' | "[" | "{"): number {
  const close = c === '"' ? '"' : c === "[" ? "]" : "}";
  let depth = 1;
  for (let k = from + 1; k < text.length; k++) {
    if (text[k] === "\\" && c === '"') k += 1;
    else if (text[k] === close) depth -= 1;
    else if (text[k] === c) depth += 1;
    if (depth === 0) return k;
  }
  return -1;
}

function readWord(text: string, from: number, tokens: Token[]): number {
  let end = from + 1;
  while (end < text.length && !isBlank(text.charCodeAt(end)) && text[end] !== "=") end += 1;
  const word = text.slice(from, end);
  const colon = word.indexOf(":");
  if (word === ":") tokens.push({ kind: "sign", text: ":" });
  else if (colon > 0 && isKeyColon(word, colon)) {
    tokens.push({ kind: "word", text: word.slice(0, colon) }, { kind: "sign", text: ":" });
    if (colon + 1 < word.length) tokens.push({ kind: "word", text: word.slice(colon + 1) });
  } else tokens.push({ kind: "word", text: word });
  return end;
}

/** `energy:` and `energy:-1.5`, but neither `12:30` nor `species:S:1` nor an address. */
function isKeyColon(word: string, colon: number): boolean {
  if (colon === word.length - 1) return true;
  return /^[^\d+-]/.test(word) && readWhole(word.slice(colon + 1)) !== null;
}

function keyBefore(tokens: readonly Token[], at: number): string | null {
  const key = tokens[at - 2];
  if (tokens[at - 1]?.kind !== "sign" || !key || key.kind === "sign" || key.kind === "array") return null;
  // "conf 7: -12.3": a number is no name.
  return readWhole(key.text) === null ? key.text : null;
}

/** The two words behind a token that are not keys themselves. */
function wordsBehind(tokens: readonly Token[], at: number): readonly string[] {
  const behind: string[] = [];
  for (let k = at + 1; k <= at + 2; k++) {
    const token = tokens[k];
    if (token?.kind !== "word" || tokens[k + 1]?.kind === "sign") break;
    behind.push(withoutTail(token.text, ")]},;"));
  }
  return behind;
}

/** Without any of these signs at its end; a pattern would begin anew at each of them. */
function withoutTail(text: string, signs: string): string {
  let end = text.length;
  while (end > 0 && signs.includes(text.charAt(end - 1))) end -= 1;
  return text.slice(0, end);
}

/** A whole word that is a number, brackets and closing punctuation aside. */
function readWhole(word: string): { text: string; value: number | null; unit: EnergyUnit | null } | null {
  const text = withoutTail(word.replace(/^[([{<'"]+/, ""), ")]}>,;'\"");
  const length = numberLength(text, 0);
  if (length === 0) return null;
  const value = parseQuantity(text.slice(0, length));
  if (length === text.length) return { text, value, unit: null };
  const unit = text.length - length < 2 ? null : parseEnergyUnit(text.slice(length));
  return unit && { text: text.slice(0, length), value, unit };
}

interface Context {
  readonly key: string | null;
  readonly words: readonly string[];
  readonly behind: readonly string[];
  readonly repeated: boolean;
}

function numbersOf(token: Token, before: number, context: Context): CommentNumber[] {
  const pieces =
    token.kind === "word" ? [token.text] : token.text.split(/[\s,[\]{}]+/).filter((p) => p !== "");
  const read = pieces.map(readWhole);
  if (token.kind === "quoted" && read.includes(null)) return [];
  const whole = read.filter((piece) => piece !== null);
  const [first = "", second = ""] = context.behind;
  const unit = parseEnergyUnit(`${first} ${second}`) ?? parseEnergyUnit(first);
  return whole.map((piece, k) => ({
    position: before + k + 1,
    text: piece.text,
    value: piece.value,
    key: context.key,
    words: context.words,
    unit: piece.unit ?? unit,
    next: first,
    repeated: context.repeated,
    inArray: pieces.length > 1,
  }));
}
