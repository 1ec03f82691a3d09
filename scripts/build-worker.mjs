// Bundles the computing thread into .worker/, a folder of its own: `react-router build` empties build/.
import { mkdirSync, renameSync, writeFileSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";
import { build } from "esbuild";
import { compileKernel } from "./build-kernel.mjs";

const root = fileURLToPath(new URL("..", import.meta.url));

/**
 * Builds `compute.worker.mjs` and `kernel.wasm` into WORKER_DIRECTORY, by default `.worker`. Safe to run at any time
 * and several times at once: a running pool keeps what it has loaded, and nobody ever loads half a file.
 */
export async function buildWorker() {
  const outdir = path.resolve(root, process.env.WORKER_DIRECTORY || ".worker");
  const { outputFiles } = await build({
    absWorkingDir: root,
    entryPoints: { "compute.worker": "app/workers/compute.worker.ts" },
    outdir,
    outExtension: { ".js": ".mjs" },
    bundle: true,
    platform: "node",
    format: "esm",
    target: "node20",
    packages: "external",
    sourcemap: true,
    logLevel: "warning",
    write: false,
  });
  const kernel = { path: path.join(outdir, "kernel.wasm"), contents: await compileKernel() };
  for (const { path: file, contents } of [...outputFiles, kernel]) {
    mkdirSync(path.dirname(file), { recursive: true });
    const fresh = `${file}.${process.pid}`;
    writeFileSync(fresh, contents);
    renameSync(fresh, file);
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) await buildWorker();
