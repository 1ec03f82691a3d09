import argon2 from "argon2";
import { env } from "../../env.server.ts";

function options() {
  return { type: argon2.argon2id, memoryCost: env().ARGON2_MEMORY_KIB, timeCost: 2, parallelism: 1 } as const;
}

// The same text reaches us composed from one keyboard and decomposed from another.
const normal = (password: string) => password.normalize("NFC");

/** argon2id with 19,456 KiB, 2 passes, 1 lane; the parameters stand in the hash. */
export function hashPassword(password: string): Promise<string> {
  return argon2.hash(normal(password), options());
}

let standIn: Promise<string> | undefined;

/**
 * Compares a password with a hash, or with one of nothing where there is no account, so that both take the same time.
 *
 * @returns whether it is right, and whether its hash is weaker than today's parameters
 */
export async function verifyPassword(
  hash: string | null,
  password: string,
): Promise<{ right: boolean; stale: boolean }> {
  standIn ??= hashPassword("no account has this password");
  const right = await argon2.verify(hash ?? (await standIn), normal(password));
  return { right: right && hash !== null, stale: hash !== null && argon2.needsRehash(hash, options()) };
}
