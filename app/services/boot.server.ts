import { closeDatabase } from "../db/client.server.ts";
import { migrateDatabase } from "../db/migrate.server.ts";
import { findRightsOverRecords } from "../db/rights.server.ts";
import { env } from "../env.server.ts";
import { sweepEnded } from "./auth/sweep.server.ts";
import { inBackground, settleBackground } from "./background.server.ts";
import { sweepUploads } from "./ensembles/sweep-uploads.server.ts";
import { workerBundle, workerBundleExists } from "./jobs/pool.server.ts";
import { startJobs } from "./jobs/run-jobs.server.ts";
import { shutDownJobs } from "./jobs/shutdown.server.ts";
import { log } from "./log.server.ts";
import { sendDigests } from "./mail/digest.server.ts";
import { remindOfLinks } from "./mail/remind-links.server.ts";
import { startMail, stopMail } from "./mail/send-mail.server.ts";
import { purgeDeleted } from "./purge.server.ts";
import { seedDemo, seedExample } from "./seed/seed-demo.server.ts";
import { seedEditions } from "./seed/seed-editions.server.ts";
import { closeDemoAccounts, seedPeople } from "./teams/seed-people.server.ts";

const SWEEP_EVERY_MS = 3_600_000;

export interface Booted {
  /** What the start prints; null where there are no demo accounts. */
  demo: { email: string; password: string } | null;
}

async function seed(): Promise<Booted["demo"]> {
  const { public: open, DEMO_PASSWORD: password } = env();
  if (open) {
    await closeDemoAccounts();
    await seedExample();
    return null;
  }
  if (password === undefined) return null;
  await seedPeople(password);
  await seedDemo();
  return { email: "analyst@lowlying.example", password };
}

/** An account that may change tables can get round the triggers that keep the logbook: said, not refused. */
async function lookAtRights(): Promise<void> {
  const rights = await findRightsOverRecords();
  if (rights.length === 0) return;
  log.warn(
    { rights },
    "the application's database account could change the logbook and editions: give it SELECT, INSERT, UPDATE and DELETE only, and the address of the account that owns the tables in DATABASE_MIGRATION_URL",
  );
}

let sweeper: NodeJS.Timeout | undefined;

function startSweeping(): void {
  const sweep = () =>
    Promise.all([sweepEnded(), sweepUploads(), purgeDeleted(), remindOfLinks(), sendDigests()]).catch(
      (error) => log.warn({ err: error }, "not swept"),
    );
  sweeper = setInterval(sweep, SWEEP_EVERY_MS);
  sweeper.unref();
  sweep();
}

/**
 * Brings the application up to where requests can be served: settings checked, tables up to date, demo people and
 * data there, jobs and mail under way.
 *
 * @throws EnvError, DatabaseSettingsError, or what the database says; nothing is left running then
 */
export async function boot(): Promise<Booted> {
  // A missing thread entry would end the server at the first sift.
  if (!workerBundleExists()) throw new Error(`${workerBundle()} is missing: run npm run build.`);
  await migrateDatabase();
  await lookAtRights();
  const demo = await seed();
  await startJobs();
  // Their sifts take seconds, which nobody who starts should wait for.
  if (demo !== null) inBackground("editions of the demo", seedEditions);
  startMail();
  startSweeping();
  return { demo };
}

/** Ends what `boot` started: jobs go back to the queue, letters on their way are finished, connections closed. */
export async function shutDown(): Promise<void> {
  clearInterval(sweeper);
  await shutDownJobs();
  await settleBackground();
  await stopMail();
  await closeDatabase();
}
