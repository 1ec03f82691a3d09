import { readFileSync } from "node:fs";
import path from "node:path";
import { pathToFileURL } from "node:url";
import { noteAddress } from "./address.mjs";
import { buildPlaces, needBuild } from "./build.mjs";
import { dataFolder, loadSettings, needPort, portTaken, prepare } from "./prepare.mjs";
import { endRunning, StartError } from "./processes.mjs";
import { makeServer } from "./serve.mjs";

const say = (text) => console.log(text);
/** For requests that are open when the process is told to stop. */
const PATIENCE_MS = 20_000;
const EXPECTED = new Set(["EnvError", "DatabaseSettingsError"]);

const state = { stopping: null, opening: null, application: null, http: null, watch: null, afterStop: null };

/** Ends all that was started, in the opposite order. A second signal finds the same shutdown under way. */
function stop(code) {
  state.stopping ??= (async () => {
    endRunning();
    clearInterval(state.watch);
    // Both at once: waiting calls are answered by the shutdown of the jobs, and only then finished.
    const closing = state.http?.close(PATIENCE_MS);
    try {
      await Promise.all([closing, state.application?.endJobs()]);
      await state.application?.shutDown();
      // A stop in the middle of a start waits for the database to be up, so as not to leave it behind.
      const [opened] = await Promise.allSettled([state.opening]);
      await opened.value?.close();
      await state.afterStop?.();
    } catch (error) {
      console.error(error);
      process.exit(1);
    }
    process.exit(code);
  })();
  return state.stopping;
}

async function main() {
  loadSettings();
  process.env.NODE_ENV ||= "production";
  await needPort();
  state.opening = prepare(say);
  const database = await state.opening;
  const places = buildPlaces(process.env.BUILD_FOLDER);
  await needBuild(places, say);
  process.env.WORKER_DIRECTORY = places.worker;
  const build = await import(pathToFileURL(path.join(places.build, "server/index.js")).href);
  const { application } = build.entry.module;
  if (state.stopping) return;
  const { demo } = await application.boot();
  state.application = application;
  const { HOST, PORT, APP_ORIGIN } = application.env();
  state.http = makeServer({
    application,
    handle: application.makeHandler(build, process.env.NODE_ENV),
    staticFolder: path.join(places.build, "client"),
  });
  await state.http.listen(PORT, HOST).catch((error) => {
    throw error.code === "EADDRINUSE" ? portTaken(PORT, HOST) : error;
  });
  noteAddress(dataFolder(), APP_ORIGIN);
  state.watch = database?.keepAlive(application.log);
  const { version } = JSON.parse(readFileSync("package.json", "utf8"));
  say(`Lowlying ${version} is ready. Ctrl-C stops it.`);
  if (demo) say(`Demo sign-in: ${demo.email} / ${demo.password}`);
  say(`Lowlying: ${APP_ORIGIN}`);
}

/**
 * Starts everything and serves until a signal ends it.
 *
 * @param options.afterStop work for the very end, after the database was left
 */
export async function start({ afterStop = null } = {}) {
  state.afterStop = afterStop;
  for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"]) process.on(signal, () => stop(0));
  try {
    await main();
  } catch (error) {
    if (!state.stopping) {
      console.error(error instanceof StartError || EXPECTED.has(error.name) ? error.message : error);
    }
    await stop(state.stopping ? 0 : 1);
  }
}
