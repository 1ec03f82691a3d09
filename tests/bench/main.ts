import { existsSync } from "node:fs";
import path from "node:path";
import { readXyz } from "../factories/read-xyz.ts";
import { processor } from "./clock.ts";
import { type Molecule, makeSymmetric, symmetricMolecule } from "./inputs.ts";
import { matrixRows } from "./matrix-rows.ts";
import { pairRows } from "./pair-rows.ts";
import { PairBench } from "./pairs.ts";
import { Report, type Settings } from "./report.ts";
import { countRows, longSetRows, symmetricSetRows } from "./set-rows.ts";

/**
 * Every figure of the performance page, with the ratio to a straightforward implementation (Kabsch by SVD, brute force
 * over mappings, a reader by split and Number) timed in the same run. Started by scripts/bench.mjs.
 */
async function bench(settings: Settings): Promise<void> {
  const report = new Report(settings);
  const base = symmetricMolecule(settings);
  if (base.name !== "M") {
    report.say("../shared/reference is not there: fixtures/reference stands in for its large ensembles.");
  }
  if (report.wants("pairs")) pairRows(report, base);
  const made = makeSymmetric(settings, base, 10_000);
  const from = processor();
  const { block, comments } = readXyz(made.file);
  const yardstick = {
    reading: made.bytes / 1e6 / (processor() - from),
    kabsch: new PairBench(base, "heavy", { symmetry: false, pairs: 2000 }).yardstick(2000),
  };
  const many: Molecule = { ...base, block };
  if (report.wants("sets")) symmetricSetRows(report, made, base, yardstick);
  if (report.wants("counts")) countRows(report, made, many, comments);
  if (report.wants("matrix")) await matrixRows(report, many, yardstick.kabsch);
  if (report.wants("long")) longSetRows(report, yardstick);
  if (!report.finish()) process.exitCode = 1;
}

const [root, scratch, ...flags] = process.argv.slice(2) as [string, string, ...string[]];
if (!existsSync(path.join(root, "fixtures"))) throw new Error(`${root} is no checkout.`);
const flagOf = (name: string) => flags.find((flag) => flag.startsWith(`--${name}=`))?.split("=")[1] ?? null;
await bench({
  root,
  scratch,
  runs: Number(flagOf("runs") ?? 5),
  json: flags.includes("--json"),
  only: flagOf("only"),
});
