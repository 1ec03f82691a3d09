import { createHash, randomBytes } from "node:crypto";

const ALPHABET = "abcdefghijklmnopqrstuvwxyz234567";
const LENGTH = 32;
const FORM = /^[a-z2-7]{32}$/;

/** A new secret of a link: 160 random bits as 32 characters of base32, which read out and survive mail programs. */
export function newLinkSecret(): string {
  let secret = "";
  // A byte carries eight even choices of 32, so the lowest five bits are even too.
  for (const byte of randomBytes(LENGTH)) secret += ALPHABET[byte & 31];
  return secret;
}

/** True for the form of a secret; says nothing of whether it opens anything. */
export function isLinkSecret(text: string): boolean {
  return FORM.test(text);
}

/** What the database keeps of it. Its 160 random bits need no slow hash. */
export function linkSha(secret: string): Buffer {
  return createHash("sha256").update(secret, "utf8").digest();
}

/** What people know a link by: the first characters, which open nothing. */
export function linkPrefix(secret: string): string {
  return secret.slice(0, 4);
}
