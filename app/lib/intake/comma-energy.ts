import { scanComment } from "./comment-numbers.ts";
import { namesEnergy } from "./energy-words.ts";
import { readNumber } from "./numbers.ts";

/**
 * What stands in a comment line as its energy where that is written with a decimal comma (row X22): behind a key that
 * names an energy, or as all of the line. Null for any other comment.
 *
 * @param comment as the file has it
 * @returns the text, such as `-15,775161`; whether it is a decimal comma is for the user to say
 * @example commaEnergy("energy=-15,775161") // "-15,775161"
 */
export function commaEnergy(comment: string): string | null {
  // Most comments have no comma, and one character is found faster than a word.
  if (!comment.includes(",") || !/\d*,\d/.test(comment)) return null;
  const whole = comment.trim();
  if (isComma(whole)) return whole;
  for (const [key, { text, number }] of scanComment(comment).keyed) {
    if (number === null && namesEnergy(key) && isComma(text)) return text;
  }
  return null;
}

/** A point beside the comma, as in `1.234,5`, is left to whoever writes the file. */
function isComma(text: string): boolean {
  return text.length <= 80 && !text.includes(".") && readNumber(text).fault === "decimal-comma";
}
