import { closeDatabase } from "../db/client.server.ts";
import { isDatabaseAway } from "../db/driver-errors.server.ts";
import { migrationsAreIn } from "../db/migrate.server.ts";
import { DomainError } from "../lib/errors.ts";
import { databaseAway } from "./http.server.ts";

async function needTables(): Promise<void> {
  if (await migrationsAreIn()) return;
  throw new DomainError(
    "conflict",
    "No tables yet",
    "The database does not hold the tables of this version yet. Start the application once (npm start), then try again.",
  );
}

/**
 * Runs one act of a command and ends the connections, so that its process can end.
 *
 * @throws DomainError in words for the command line, where nobody wants to read SQL
 */
export async function onCommandLine<Result>(act: () => Promise<Result>): Promise<Result> {
  try {
    await needTables();
    return await act();
  } catch (error) {
    throw isDatabaseAway(error) ? databaseAway(error) : error;
  } finally {
    await closeDatabase();
  }
}
