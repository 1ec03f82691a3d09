// `npm run -s backup -- DIR` writes everything that the instance keeps into a new folder; it may be running.
// `npm run -s restore -- DIR` loads it into an empty database and makes sure that every row came back.
// Both use the account that owns the tables: that of DATABASE_MIGRATION_URL, else of DATABASE_URL; or the server of .data,
// which they start where it does not run.
import { readFileSync } from "node:fs";
import path from "node:path";
import { openDatabase } from "./database.mjs";
import { backUp, restore } from "./lib/backup.mjs";
import { dataFolder, loadSettings } from "./lib/prepare.mjs";
import { StartError } from "./lib/processes.mjs";

const count = new Intl.NumberFormat("en");

async function main([act, folder, ...rest]) {
  if ((act !== "backup" && act !== "restore") || !folder || rest.length > 0) {
    throw new StartError("Name one folder: npm run -s backup -- DIR, or npm run -s restore -- DIR");
  }
  // As seen from where the command was given.
  const place = path.resolve(process.env.INIT_CWD ?? ".", folder);
  loadSettings();
  const { version } = JSON.parse(readFileSync("package.json", "utf8"));
  const say = console.error;
  const own = process.env.DATABASE_URL ? null : await openDatabase({ folder: dataFolder(), say });
  const given = process.env.DATABASE_MIGRATION_URL || process.env.DATABASE_URL;
  const url = own?.ownerUrl ?? given.replace(/^mariadb:/, "mysql:");
  try {
    const done = await (act === "backup" ? backUp : restore)({ url, folder: place, version, say });
    const what = `${count.format(done.rows)} rows in ${count.format(Object.keys(done.tables).length)} tables`;
    console.log(
      act === "backup"
        ? `Backed up into ${place}: ${what}, ${count.format(Math.ceil(done.bytes / 2 ** 20))} MB.`
        : `Restored from ${place}, as of ${done.made}: ${what}, each equal to what was saved. npm start opens it.`,
    );
  } finally {
    await own?.close();
  }
}

main(process.argv.slice(2)).catch((error) => {
  console.error(error instanceof StartError ? error.message : error);
  process.exit(1);
});
