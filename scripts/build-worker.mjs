// Bundles the computing thread into .worker/, a folder of its own: `react-router build` empties build/.
import { fileURLToPath } from "node:url";
import { build } from "esbuild";

const root = fileURLToPath(new URL("..", import.meta.url));

/** Builds `.worker/compute.worker.mjs`; safe to run at any time, a running pool keeps what it has loaded. */
export async function buildWorker() {
  await build({
    absWorkingDir: root,
    entryPoints: { "compute.worker": "app/workers/compute.worker.ts" },
    outdir: process.env.WORKER_DIRECTORY || ".worker",
    outExtension: { ".js": ".mjs" },
    bundle: true,
    platform: "node",
    format: "esm",
    target: "node20",
    packages: "external",
    sourcemap: true,
    logLevel: "warning",
  });
}

if (process.argv[1] === fileURLToPath(import.meta.url)) await buildWorker();
