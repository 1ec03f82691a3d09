// `npm run -s token -- --email ADDRESS [--team NAME|ID] [--scope full|read|add] [--days N] [--name TEXT]`
// Prints a new API token of that user and nothing else: with all that the user's role allows, ending after 30 days, unless
// said otherwise. Uses the database of the running instance: DATABASE_URL, or
// the server of .data, which `npm start` runs.
import { parseArgs } from "node:util";
import { runningUrl } from "./database.mjs";
import { dataFolder, loadSettings } from "./lib/prepare.mjs";
import { inWords, StartError } from "./lib/processes.mjs";

const USAGE =
  "npm run -s token -- --email ADDRESS [--team NAME or ID] [--scope full, read or add] [--days N] [--name TEXT]";

function readArguments() {
  let values;
  try {
    ({ values } = parseArgs({
      options: {
        email: { type: "string" },
        team: { type: "string" },
        scope: { type: "string" },
        days: { type: "string" },
        name: { type: "string", default: "made on the command line" },
      },
    }));
  } catch (error) {
    throw new StartError(`${error.message}\n${USAGE}`);
  }
  const { email, scope, days } = values;
  if (!email) throw new StartError(`Say whose token: --email ADDRESS\n${USAGE}`);
  if (scope !== undefined && !["full", "read", "add"].includes(scope)) {
    throw new StartError(`--scope is one of full, read, add; "${scope}" is none of them.`);
  }
  if (days !== undefined && !(/^\d{1,3}$/.test(days) && Number(days) > 0 && Number(days) <= 366)) {
    throw new StartError(`--days is a whole number from 1 to 366; "${days}" is none.`);
  }
  return { ...values, name: values.name.slice(0, 120), days: days === undefined ? undefined : Number(days) };
}

async function main() {
  const options = readArguments();
  loadSettings();
  process.env.DATABASE_URL ||= runningUrl(dataFolder()) ?? "";
  if (!process.env.DATABASE_URL) {
    throw new StartError(
      "No database runs here. Start the application first (npm start), or set DATABASE_URL.",
    );
  }
  process.env.LOG_LEVEL ||= "silent";
  const { tsImport } = await import("tsx/esm/api");
  const { makeTokenOnce } = await tsImport("../app/services/auth/make-token-once.server.ts", import.meta.url);
  console.log(await makeTokenOnce(options));
}

main().catch((error) => {
  console.error(inWords(error));
  process.exit(1);
});
