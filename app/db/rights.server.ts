import type { Connection, RowDataPacket } from "mysql2/promise";
import { pool } from "./client.server.ts";

/** Rights that get round the triggers which keep the logbook and the editions from being changed. */
const DANGEROUS = ["DROP", "ALTER", "TRIGGER", "SUPER", "CREATE USER"];
const GUARDED = new Set(["logbook", "editions", "edition_files", "verifications", "teams", "ensembles"]);

/** True where a grant's object, as the server writes it, takes in a table that only grows. */
function reachesRecords(object: string, database: string): boolean {
  if (object === "*.*") return true;
  const match = /^`(.+)`\.(?:\*|`(.+)`)$/.exec(object);
  if (match === null) return false;
  const [, schema = "", table] = match;
  if (table !== undefined) return schema === database && GUARDED.has(table);
  // Of a schema the name is a pattern, as of LIKE.
  const pattern = schema.replace(/\\([%_])|%|_|[.*+?^${}()|[\]\\]/g, (found, escaped?: string) =>
    escaped !== undefined ? escaped : found === "%" ? ".*" : found === "_" ? "." : `\\${found}`,
  );
  return new RegExp(`^${pattern}$`).test(database);
}

/**
 * Rights by which an account could change what is never changed: rows of the logbook and of editions.
 *
 * @param grants lines of SHOW GRANTS
 * @returns names of rights; empty where it can only add
 * @example rightsOverRecords(["GRANT SELECT, INSERT, UPDATE, DELETE ON `lowlying`.* TO `app`@`%`"], "lowlying") // []
 */
export function rightsOverRecords(grants: readonly string[], database: string): string[] {
  const found = new Set<string>();
  for (const grant of grants) {
    const [, rights = "", object = ""] = /^GRANT (.+?) ON (\S+) TO /.exec(grant) ?? [];
    if (!reachesRecords(object, database)) continue;
    const names = rights.split(/,\s*/);
    if (names.includes("ALL PRIVILEGES")) found.add("ALL PRIVILEGES");
    for (const name of DANGEROUS) if (names.includes(name)) found.add(name);
  }
  return [...found];
}

/** The same of the account that the running application uses. */
export async function findRightsOverRecords(): Promise<string[]> {
  const [rows] = await pool().query<RowDataPacket[]>("show grants");
  const [names] = await pool().query<RowDataPacket[]>("select database() as name");
  const grants = rows.map((row) => String(Object.values(row)[0]));
  return rightsOverRecords(grants, String(names[0]?.name));
}

/**
 * Makes the triggers those of this account. A trigger runs with the rights of who made it: one of an account that has
 * lost the right to triggers since would refuse everything, the removal of a whole team too.
 */
export async function ownTriggers(connection: Connection): Promise<void> {
  const [rows] = await connection.query<RowDataPacket[]>(
    `select trigger_name as name, action_timing as timing, event_manipulation as event, event_object_table as tableName,
      action_statement as statement
      from information_schema.triggers where trigger_schema = database() and definer <> current_user()`,
  );
  for (const { name, timing, event, tableName, statement } of rows) {
    await connection.query(
      `create or replace trigger \`${name}\` ${timing} ${event} on \`${tableName}\` for each row ${statement}`,
    );
  }
}
