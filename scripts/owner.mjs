// `npm run -s owner -- --email ADDRESS --team NAME`
// Makes a team and prints the one-time link by which its first owner joins; run again before anybody joined, a new link to
// the same team. Uses the database of the running instance: DATABASE_URL, or the server of .data, which `npm start` runs.
import { parseArgs } from "node:util";
import { runningUrl } from "./database.mjs";
import { addressOf } from "./lib/address.mjs";
import { dataFolder, loadSettings } from "./lib/prepare.mjs";
import { inWords, StartError } from "./lib/processes.mjs";

const USAGE = "npm run -s owner -- --email ADDRESS --team NAME";

function readArguments() {
  let values;
  try {
    ({ values } = parseArgs({ options: { email: { type: "string" }, team: { type: "string" } } }));
  } catch (error) {
    throw new StartError(`${error.message}\n${USAGE}`);
  }
  const { email, team } = values;
  if (!email || !team) throw new StartError(`Say who and which team: --email ADDRESS --team NAME\n${USAGE}`);
  return { email, team };
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
  const { makeFirstOwnerOnce } = await tsImport(
    "../app/services/people/first-owner.server.ts",
    import.meta.url,
  );
  const { secret, renewed } = await makeFirstOwnerOnce(options);
  console.log(`${addressOf(dataFolder())}/invitation/${secret}`);
  if (renewed) {
    console.error(
      "The team waited for this owner already: this is a new link to it, the one of before has ended.",
    );
  }
}

main().catch((error) => {
  console.error(inWords(error));
  process.exit(1);
});
