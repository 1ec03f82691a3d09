// Compiles assembly/kernel.ts to WebAssembly with SIMD; `buildWorker` puts it beside the computing thread.
import { readFileSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";
import asc from "assemblyscript/asc";

const SOURCE = path.join(fileURLToPath(new URL("..", import.meta.url)), "assembly/kernel.ts");

/** Compiles the kernel; the same source gives the same bytes. */
export async function compileKernel() {
  const files = new Map();
  const { error, stderr } = await asc.main(
    ["kernel.ts", "--outFile", "kernel.wasm", "-O3", "--noAssert", "--runtime", "stub", "--enable", "simd"],
    {
      readFile: (name) => (path.basename(name) === "kernel.ts" ? readFileSync(SOURCE, "utf8") : null),
      writeFile: (name, contents) => files.set(name, contents),
      listFiles: () => [],
    },
  );
  const compiled = files.get("kernel.wasm");
  if (error || !compiled) throw new Error(`The kernel does not compile. ${stderr}`, { cause: error });
  return compiled;
}
