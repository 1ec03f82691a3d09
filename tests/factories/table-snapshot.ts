import { createHash } from "node:crypto";
import type { RowDataPacket } from "mysql2/promise";
import { pool } from "~/db/client.server";

/** What the mere look at something writes, and nothing else: when, how often, how fast. */
const NOTED_BY_LOOKING: Record<string, readonly string[]> = {
  sessions: ["seen_at", "ends_at"],
  api_tokens: ["used_at"],
  links: ["opened", "opened_at"],
};
/** Counters of attempts, and jobs, whose runner works by itself. */
const LEFT_OUT = new Set(["throttles", "jobs", "__drizzle_migrations"]);

const plain = (value: unknown): unknown =>
  Buffer.isBuffer(value) ? createHash("sha256").update(value).digest("hex") : value;

/** Every row of every table as text, by table, but for what looking at things notes. */
export async function snapshotTables(): Promise<Map<string, string[]>> {
  const [tables] = await pool().query<(RowDataPacket & { name: string })[]>(
    "select table_name as name from information_schema.tables where table_schema = database()",
  );
  const found = new Map<string, string[]>();
  for (const { name } of tables) {
    if (LEFT_OUT.has(name)) continue;
    const [rows] = await pool().query<RowDataPacket[]>(`select * from \`${name}\``);
    const omitted = NOTED_BY_LOOKING[name] ?? [];
    const lines = rows.map((row) =>
      JSON.stringify(
        Object.entries(row)
          .filter(([column]) => !omitted.includes(column))
          .map(([column, value]) => [column, plain(value)]),
      ),
    );
    found.set(name, lines.toSorted());
  }
  return found;
}

/** Rows that are in the second and not in the first snapshot, and those that are gone, by table. */
export function changesBetween(before: Map<string, string[]>, after: Map<string, string[]>) {
  const changed: { table: string; row: string }[] = [];
  for (const table of new Set([...before.keys(), ...after.keys()])) {
    const [old, now] = [new Set(before.get(table)), new Set(after.get(table))];
    for (const row of now) if (!old.has(row)) changed.push({ table, row });
    for (const row of old) if (!now.has(row)) changed.push({ table, row: `gone: ${row}` });
  }
  return changed;
}
