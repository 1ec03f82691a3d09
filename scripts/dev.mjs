// `npm run dev`: the database of .data, and the application from its sources, reloaded as they change.
import { noteAddress } from "./lib/address.mjs";
import { dataFolder, loadSettings, needPort, prepare } from "./lib/prepare.mjs";
import { endRunning, ROOT, StartError } from "./lib/processes.mjs";
import { makeServer } from "./lib/serve.mjs";

const say = (text) => console.log(text);
const SERVER_BUILD = "virtual:react-router/server-build";

const BROWSER_PACKAGES = [
  "react",
  "react/jsx-runtime",
  "react/jsx-dev-runtime",
  "react-dom/client",
  "react-router",
  "react-router/dom",
  "@tanstack/react-virtual",
  "lucide-react",
  "radix-ui",
  "swr",
  "zod",
];

/** Seen in route modules before the router takes their server halves out. */
const SERVER_PACKAGES = [
  "argon2",
  "busboy",
  "drizzle-orm",
  "mysql2",
  "nodemailer",
  "pino",
  "piscina",
  "remix-auth",
  "remix-auth-form",
  "zod-openapi",
];

const state = { stopping: null, database: null, application: null, http: null, vite: null };

function stop(code) {
  state.stopping ??= (async () => {
    endRunning();
    await Promise.all([state.http?.close(2_000), state.application?.endJobs()]);
    await state.application?.shutDown();
    await state.vite?.close();
    await state.database?.close();
    process.exit(code);
  })();
  return state.stopping;
}

/** Rebuilds the computing thread as its sources change; a thread that runs keeps what it has loaded. */
async function watchWorker(vite) {
  const { buildWorker } = await import("./build-worker.mjs");
  await buildWorker();
  let waiting;
  vite.watcher.on("change", (file) => {
    if (!/\/app\/(lib|workers)\/(?!.*\.test\.)/.test(file)) return;
    clearTimeout(waiting);
    waiting = setTimeout(() => buildWorker().catch((error) => console.error(error.message)), 200);
  });
}

async function main() {
  loadSettings();
  process.env.NODE_ENV = "development";
  await needPort();
  state.database = await prepare(say);
  const { createServer } = await import("vite");
  // The reload channel shares the application's port: the vite server is made once the http server is there.
  const early = (request, response, next) =>
    state.vite ? state.vite.middlewares(request, response, next) : next();
  const load = () => state.vite.environments.ssr.runner.import(SERVER_BUILD);
  const frame = (application) =>
    makeServer({
      application,
      handle: application.makeHandler(load, "development"),
      staticFolder: null,
      before: early,
    });
  const { createServer: plainServer } = await import("node:http");
  const channel = plainServer();
  state.vite = await createServer({
    root: ROOT,
    appType: "custom",
    server: { middlewareMode: true, hmr: { server: channel } },
    // What is only found while a page loads makes that page load again, with errors in between.
    optimizeDeps: { include: BROWSER_PACKAGES, exclude: SERVER_PACKAGES },
  });
  await watchWorker(state.vite);
  keepSignals();
  const { application } = (await load()).entry.module;
  const { demo } = await application.boot();
  state.application = application;
  state.http = frame(application);
  state.http.server.on("upgrade", (...upgrade) => channel.emit("upgrade", ...upgrade));
  const { HOST, PORT, APP_ORIGIN } = application.env();
  await state.http.listen(PORT, HOST);
  noteAddress(dataFolder(), APP_ORIGIN);
  if (demo) say(`Demo sign-in: ${demo.email} / ${demo.password}`);
  say(`Lowlying: ${APP_ORIGIN}`);
}

const SIGNALS = ["SIGINT", "SIGTERM", "SIGHUP"];
const onSignal = () => stop(0);
for (const signal of SIGNALS) process.on(signal, onSignal);

/** Vite's servers end the process by themselves, before the jobs are handed back and the database is left. */
function keepSignals() {
  for (const signal of SIGNALS) {
    for (const listener of process.listeners(signal)) {
      if (listener !== onSignal) process.off(signal, listener);
    }
  }
  process.stdin.removeAllListeners("end");
}

main().catch(async (error) => {
  if (!state.stopping)
    console.error(error instanceof StartError || error.name === "EnvError" ? error.message : error);
  await stop(state.stopping ? 0 : 1);
});
