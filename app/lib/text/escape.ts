/** Longest `found` of a message, in characters. */
const FOUND_LENGTH = 80;

/**
 * True for characters that steer a screen instead of showing something: controls (tab aside), marks of text
 * direction, zero-width ones and the byte order mark. Row G13.
 */
function steers(code: number): boolean {
  if (code < 0x20) return code !== 9;
  if (code < 0x7f) return false;
  if (code <= 0x9f) return true;
  if (code < 0x2000) return code === 0xad || code === 0x61c;
  return (
    (code >= 0x200b && code <= 0x200f) ||
    (code >= 0x2028 && code <= 0x202e) ||
    (code >= 0x2060 && code <= 0x206f) ||
    code === 0xfeff
  );
}

/**
 * Whether a text holds characters that must not reach a screen as they are.
 *
 * @example hasSteeringCharacters("conf\u202e1") // true
 */
export function hasSteeringCharacters(text: string): boolean {
  for (let k = 0; k < text.length; k++) if (steers(text.charCodeAt(k))) return true;
  return false;
}

/**
 * The text with control and text-direction characters written out (`\n`, `\t`, `\u202e`); lone halves of a
 * surrogate pair too, so that what is returned is valid text.
 *
 * @example escapeControls("a\u0007b") // "a\\u0007b"
 */
export function escapeControls(text: string): string {
  let escaped = "";
  for (const character of text) {
    const code = character.codePointAt(0) ?? 0;
    if (code === 9) escaped += "\\t";
    else if (code === 10) escaped += "\\n";
    else if (code === 13) escaped += "\\r";
    else if (steers(code) || (code >= 0xd800 && code <= 0xdfff)) {
      escaped += `\\u${code.toString(16).padStart(4, "0")}`;
    } else escaped += character;
  }
  return escaped;
}

/**
 * The same for a text of lines on a page: line breaks and tabs stay.
 *
 * @example escapeLines("one\ntwo\u202e") // "one\ntwo\\u202e"
 */
export function escapeLines(text: string): string {
  return text
    .split(/([\n\r\t])/)
    .map((part, k) => (k % 2 === 1 ? part : escapeControls(part)))
    .join("");
}

/**
 * What a message quotes from a file: escaped, and cut at 80 characters with an ellipsis as the last.
 *
 * @example quoteFound("1,234") // "1,234"
 */
export function quoteFound(text: string): string {
  // Cut before escaping, so that a line of a megabyte costs nothing; escaping only makes it longer.
  const head = text.slice(0, FOUND_LENGTH + 1);
  const characters = [...escapeControls(head)];
  if (characters.length <= FOUND_LENGTH) return characters.join("");
  return `${characters.slice(0, FOUND_LENGTH - 1).join("")}…`;
}
