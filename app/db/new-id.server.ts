import { randomBytes } from "node:crypto";
import { ID_LENGTH } from "./columns.server.ts";

const ALPHABET = "abcdefghijklmnopqrstuvwxyz234567";

/** Every id has this form; what has another is not found, without a question to the database. */
export const ID_PATTERN = /^[a-z2-7]{16}$/;

/** True for the form of an id; says nothing of whether it exists. */
export function isId(text: string | undefined | null): text is string {
  return typeof text === "string" && ID_PATTERN.test(text);
}

/**
 * A new id: 80 random bits as 16 characters of base32. Made in the application because the database dialect
 * returns none on insert.
 *
 * @example newId() // "k3vq2xw7mzta5hcd"
 */
export function newId(): string {
  let id = "";
  // A byte carries eight even choices of 32, so the lowest five bits are even too.
  for (const byte of randomBytes(ID_LENGTH)) id += ALPHABET[byte & 31];
  return id;
}
