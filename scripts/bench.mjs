// Measures every figure of the performance page: `npm run bench -- [--json] [--runs=5] [--only=pairs|sets|counts|matrix|long]`.
// Large inputs are made anew in the folder for temporary files and removed again.
import { spawnSync } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { fileURLToPath } from "node:url";
import { build } from "esbuild";
import { compileKernel } from "./build-kernel.mjs";

const root = fileURLToPath(new URL("..", import.meta.url));
const scratch = mkdtempSync(path.join(tmpdir(), "lowlying-bench-"));
try {
  await build({
    absWorkingDir: root,
    entryPoints: ["main", "text-to-set", "matrix-thread"].map((name) => `tests/bench/${name}.ts`),
    outdir: scratch,
    outExtension: { ".js": ".mjs" },
    bundle: true,
    platform: "node",
    format: "esm",
    target: "node20",
    logLevel: "warning",
  });
  writeFileSync(path.join(scratch, "kernel.wasm"), await compileKernel());
  const flags = [path.join(scratch, "main.mjs"), root, scratch, ...process.argv.slice(2)];
  process.exitCode = spawnSync(process.execPath, flags, { stdio: "inherit" }).status ?? 1;
} finally {
  rmSync(scratch, { recursive: true, force: true });
}
