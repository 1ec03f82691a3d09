/** So many characters of data are kept of one record; a delimiter that is missing must not fill the memory. */
export const FIELD_CHARACTERS = 1024 * 1024;

/**
 * The name that a header line gives its data field, or null where the line is none: from the first `<` to the last
 * `>`, else the field number `DTn` (rows S16, S18).
 *
 * @example fieldName("> 25 <a > b>  (7)") // "a > b"
 */
export function fieldName(text: string): string | null {
  if (!text.startsWith(">")) return null;
  const from = text.indexOf("<");
  const to = text.lastIndexOf(">");
  if (from >= 0 && to > from) return text.slice(from + 1, to).trim();
  return /\bDT\d+/.exec(text)?.[0] ?? null;
}

/** The data behind a MOL block, line by line (rows S15 to S19). */
export class FieldCollector {
  readonly fields = new Map<string, string[]>();
  /** Values taken, those of a tag that stands twice counted twice. */
  count = 0;
  /** First tag that stands twice. */
  twice: string | null = null;
  /** First line of text that no header announces (row S17). */
  stray: { readonly line: number; readonly text: string } | null = null;
  /** Text before the first header. */
  note = "";
  /** More came than is kept. */
  cut = false;
  #name: string | null = null;
  #parts: string[] = [];
  /** False once a blank line has ended the value. */
  #open = false;
  #characters = 0;

  take(text: string, line: number): void {
    const name = fieldName(text);
    if (name !== null) {
      this.#commit();
      this.#name = name;
      this.#open = true;
    } else if (text.trim() === "") this.#open = false;
    else this.#takeText(text, line);
  }

  #takeText(text: string, line: number): void {
    if (!this.#open) this.stray ??= { line, text };
    this.#characters += text.length;
    if (this.#characters > FIELD_CHARACTERS) this.cut = true;
    else if (this.#name === null) this.note += `${text}\n`;
    else {
      // Text behind the end of a value belongs to it; the blank line between stays.
      if (!this.#open && this.#parts.length > 0) this.#parts.push("");
      this.#open = true;
      this.#parts.push(text);
    }
  }

  /** No header and no text came. */
  get isEmpty(): boolean {
    return this.#name === null && this.count === 0 && this.note === "";
  }

  /** No more lines come. */
  end(): void {
    this.#commit();
  }

  #commit(): void {
    if (this.#name === null) return;
    const value = this.#parts.join("\n");
    const known = this.fields.get(this.#name);
    if (known) {
      this.twice ??= this.#name;
      known.push(value);
    } else this.fields.set(this.#name, [value]);
    this.count += 1;
    this.#name = null;
    this.#parts = [];
  }
}
