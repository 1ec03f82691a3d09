// `npm run -s link -- --ensemble ID [--days N] [--for TEXT] [--contact TEXT] [--sources] [--logbook]`
// Freezes an edition (running the default sift if none is done), makes a read-only link to it, and prints its address and
// nothing else. `npm run -s link -- --end ADDRESS` ends one. Uses the database of the running instance: DATABASE_URL, or
// the server of .data, which `npm start` runs.
import { parseArgs } from "node:util";
import { runningUrl } from "./database.mjs";
import { addressOf } from "./lib/address.mjs";
import { dataFolder, loadSettings } from "./lib/prepare.mjs";
import { inWords, StartError } from "./lib/processes.mjs";

const USAGE =
  "npm run -s link -- --ensemble ID [--days N] [--for TEXT] [--contact TEXT] [--sources] [--logbook]\n" +
  "npm run -s link -- --end ADDRESS";

function readArguments() {
  let values;
  try {
    ({ values } = parseArgs({
      options: {
        ensemble: { type: "string" },
        days: { type: "string", default: "14" },
        for: { type: "string", default: "made on the command line" },
        contact: { type: "string" },
        sources: { type: "boolean", default: false },
        logbook: { type: "boolean", default: false },
        end: { type: "string" },
      },
    }));
  } catch (error) {
    throw new StartError(`${error.message}\n${USAGE}`);
  }
  if (values.end !== undefined) return { end: values.end };
  if (!values.ensemble) throw new StartError(`Say which ensemble: --ensemble ID\n${USAGE}`);
  if (!/^\d{1,4}$/.test(values.days)) {
    throw new StartError(
      `--days is a whole number; 0 makes a link that has ended. "${values.days}" is none.`,
    );
  }
  return {
    ensembleId: values.ensemble.trim(),
    days: Number(values.days),
    label: values.for.slice(0, 120),
    contact: values.contact?.slice(0, 200) ?? null,
    sources: values.sources,
    logbook: values.logbook,
  };
}

async function main() {
  const options = readArguments();
  loadSettings();
  process.env.LOG_LEVEL ||= "silent";
  process.env.DATABASE_URL ||= runningUrl(dataFolder()) ?? "";
  if (!process.env.DATABASE_URL) {
    throw new StartError(
      "No database runs here. Start the application first (npm start), or set DATABASE_URL.",
    );
  }
  const { tsImport } = await import("tsx/esm/api");
  const { endOnce, linkOnce } = await tsImport("../app/services/links/link-once.server.ts", import.meta.url);
  if ("end" in options) {
    console.log((await endOnce(options.end)) ? "The link has ended." : "The link had ended before.");
    return;
  }
  console.log(`${addressOf(dataFolder())}/e/${await linkOnce(options)}`);
}

main().then(
  // Threads of a computation would keep the process for a minute.
  () => process.exit(0),
  (error) => {
    console.error(inWords(error));
    process.exit(1);
  },
);
