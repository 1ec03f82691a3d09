import { createHash, randomBytes } from "node:crypto";

/** A new secret: 256 random bits in URL-safe base64, 43 characters. */
export function newSecret(): string {
  return randomBytes(32).toString("base64url");
}

/** What the database keeps of a secret. Its 256 random bits need no slow hash. */
export function secretSha(secret: string): Buffer {
  return createHash("sha256").update(secret, "utf8").digest();
}
