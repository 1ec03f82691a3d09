import { quoteFound } from "../text/escape.ts";
import { namesEnergy } from "./energy-words.ts";

/** Rows that are remembered of a key; of one that names an energy all, as each of its frames is told of. */
const ROWS = 100;
/** Keys that are followed; more are only counted. */
const KEYS = 200;

/** What stands behind a key that holds no number: text, a logical, several numbers, or a number that went wrong. */
export interface TextKey {
  readonly key: string;
  /** As written where it came first, for messages. */
  readonly found: string;
  /** Frames that have it. */
  readonly count: number;
  /** Text by row index, of the first rows or of all. */
  readonly rows: ReadonlyMap<number, string>;
}

/** Keys of comment lines whose value is no number, while the frames pass. */
export class TextKeys {
  readonly #keys = new Map<string, { found: string; count: number; rows: Map<number, string> }>();
  /** Further keys that came when the table was full. */
  more = 0;

  put(key: string, row: number, text: string): void {
    let entry = this.#keys.get(key);
    if (entry === undefined) {
      if (this.#keys.size >= KEYS && !namesEnergy(key)) {
        this.more += 1;
        return;
      }
      entry = { found: quoteFound(text), count: 0, rows: new Map() };
      this.#keys.set(key, entry);
    }
    entry.count += 1;
    if (entry.rows.size < ROWS || namesEnergy(key)) entry.rows.set(row, quoteFound(text));
  }

  get(key: string): TextKey | null {
    const entry = this.#keys.get(key);
    return entry === undefined ? null : { key, ...entry };
  }

  /** All of them in order of appearance. */
  all(): TextKey[] {
    return [...this.#keys].map(([key, entry]) => ({ key, ...entry }));
  }
}
