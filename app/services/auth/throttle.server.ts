import { createHash } from "node:crypto";
import { eq, lt } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { throttles } from "../../db/schema.server.ts";

export interface Throttle {
  /** What is counted, without anything personal: names are hashed before they are stored. */
  kind: string;
  subject: string;
  limit: number;
  seconds: number;
}

/** Name of a counter's row; a hash, because addresses of people stand in subjects. */
function rowName({ kind, subject }: Throttle): string {
  return `${kind}:${createHash("sha256").update(subject).digest("hex")}`;
}

/**
 * Counts an attempt before it is made, so that many at once cannot slip through.
 *
 * After `limit` attempts within `seconds` the counter rests for `seconds` from the last one that was let through.
 *
 * @returns null when the attempt may be made, else the seconds to wait
 */
export async function takeAttempt(throttle: Throttle, now = new Date()): Promise<number | null> {
  const name = rowName(throttle);
  return inTransaction(async (tx) => {
    const rows = await tx.select().from(throttles).where(eq(throttles.name, name)).for("update");
    const row = rows[0];
    const spanMs = throttle.seconds * 1000;
    const age = row === undefined ? Number.POSITIVE_INFINITY : now.getTime() - row.windowStart.getTime();
    if (row === undefined || age >= spanMs) {
      const fresh = { count: 1, windowStart: now };
      await tx
        .insert(throttles)
        .values({ name, ...fresh })
        .onDuplicateKeyUpdate({ set: fresh });
      return null;
    }
    if (row.count >= throttle.limit) return Math.max(1, Math.ceil((spanMs - age) / 1000));
    const count = row.count + 1;
    // The rest begins with the last attempt, not with the first.
    const windowStart = count === throttle.limit ? now : row.windowStart;
    await tx.update(throttles).set({ count, windowStart }).where(eq(throttles.name, name));
    return null;
  });
}

/** Forgets the attempts, after one that was right. */
export async function clearAttempts(throttle: Throttle): Promise<void> {
  await db.delete(throttles).where(eq(throttles.name, rowName(throttle)));
}

/** Removes counters that no longer hold anybody back. */
export async function sweepAttempts(now = new Date()): Promise<void> {
  await db.delete(throttles).where(lt(throttles.windowStart, new Date(now.getTime() - 86_400_000)));
}

/**
 * The range that an address is counted in: /24 of IPv4, /48 of IPv6, since one guesser commonly holds that much.
 *
 * @example addressRange("192.0.2.17") // "192.0.2.0/24"
 */
export function addressRange(address: string): string {
  const four = /^(?:::ffff:)?(\d+\.\d+\.\d+)\.\d+$/i.exec(address);
  if (four) return `${four[1]}.0/24`;
  if (!address.includes(":")) return address;
  const [head = "", tail] = address.toLowerCase().split("::", 2);
  const groups = head === "" ? [] : head.split(":");
  if (tail !== undefined) {
    const rest = tail === "" ? [] : tail.split(":");
    while (groups.length + rest.length < 8) groups.push("0");
    groups.push(...rest);
  }
  return `${groups
    .slice(0, 3)
    .map((group) => group.replace(/^0+(?=.)/, ""))
    .join(":")}::/48`;
}
