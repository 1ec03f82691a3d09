import { execFileSync, spawnSync } from "node:child_process";
import { readFileSync } from "node:fs";
import path from "node:path";
import { countAgainstTolerance } from "../../app/lib/sift/count-against-tolerance.ts";
import { kcalPer } from "../../app/lib/units.ts";
import { median, timed } from "./clock.ts";
import { type Made, type Molecule, makeLong } from "./inputs.ts";
import { PairBench } from "./pairs.ts";
import type { Report } from "./report.ts";
import type { TextToSetAnswer } from "./text-to-set.ts";

/** Megabytes a second of the straightforward reader, and its seconds for one superposition. */
export interface Yardstick {
  reading: number;
  kabsch: number;
}

/**
 * Words of a command that hold a process to one core, where the system has them: the figures are for one. Left alone the
 * engine compiles and collects on the others meanwhile, and two threads that share a core's parts each take longer.
 */
function onOneCore(): string[] {
  const core = /^Cpus_allowed_list:\s*(\d+)/m.exec(readFileSync("/proc/self/status", "utf8"))?.[1];
  const words = ["taskset", "-c", core ?? "0"];
  return spawnSync("taskset", ["-c", core ?? "0", "true"]).status === 0 ? words : [];
}

/** Medians over several processes of one kind. */
function processes(
  report: Report,
  mode: "set" | "read",
  file: string,
  options: { tolerance?: string; sifts?: number; runs: number },
) {
  const script = path.join(report.settings.scratch, "text-to-set.mjs");
  const flags = [script, mode, file, options.tolerance ?? "none", String(options.sifts ?? 1)];
  const [command = process.execPath, ...words] = [...onOneCore(), process.execPath, ...flags];
  const answers = Array.from({ length: options.runs }, (): TextToSetAnswer => {
    return JSON.parse(execFileSync(command, words).toString());
  });
  const of = (pick: (answer: TextToSetAnswer) => number) => median(answers.map(pick));
  return { first: answers[0]!, of };
}

const LIMITS = [
  { tolerance: "0.12", whole: [1.0, 0.5], sift: [0.4, 0.15], words: "e_tol 0.12" },
  { tolerance: "none", whole: [1.5, 0.6], sift: [1.5, 0.6], words: "no energy tolerance" },
] as const;

/** Rows about 10,000 frames of the symmetric molecule. */
export function symmetricSetRows(report: Report, made: Made, base: Molecule, yardstick: Yardstick): void {
  const { runs } = report.settings;
  const one = new PairBench(base, "heavy", { symmetry: true, pairs: 2 });
  const brute = one.yardstick(2 * one.plan.chain.order);
  for (const { tolerance, whole, sift, words } of LIMITS) {
    const { first, of } = processes(report, "set", made.file, { tolerance, sifts: 5, runs });
    const slow = first.pairs * brute;
    const on = `${made.what}, ${words}`;
    const cpu = of((answer) => answer.cpu);
    const again = of((answer) => median(answer.sifts.slice(1)));
    report.add({
      name: "XYZ text to distinct set and populations",
      on,
      unit: "s",
      must: whole[0],
      aim: whole[1],
      now: cpu,
      ratio: (slow + made.bytes / 1e6 / yardstick.reading) / cpu,
      note: `process start included, held to one core; wall ${of((answer) => answer.wall).toFixed(2)} s; ${first.kept} kept of ${first.accepted}; yardstick scaled up from a pair`,
    });
    report.add({
      name: "its sift alone",
      on,
      unit: "s",
      must: sift[0],
      aim: sift[1],
      now: again,
      ratio: slow / again,
      note: `again in one process, the first ${of((answer) => answer.sifts[0]!).toFixed(2)} s; ${first.pairs} pairs`,
    });
  }
  readingRow(report, made, yardstick, runs);
}

/** Rows about 50,000 frames. */
export function longSetRows(report: Report, yardstick: Yardstick): void {
  const made = makeLong(report.settings, 50_000);
  const runs = Math.min(3, report.settings.runs);
  const { first, of } = processes(report, "set", made.file, { tolerance: "0.12", runs });
  const on = `${made.what}, e_tol 0.12`;
  const cpu = of((answer) => answer.cpu);
  const slow = first.pairs * yardstick.kabsch + made.bytes / 1e6 / yardstick.reading;
  report.add({
    name: "text to distinct set, streamed",
    on,
    unit: "s",
    must: 5,
    aim: 2.5,
    now: cpu,
    ratio: slow / cpu,
    note: `wall ${of((answer) => answer.wall).toFixed(2)} s; reading ${of((answer) => answer.reading).toFixed(2)} s, sift ${of((answer) => answer.sifts[0]!).toFixed(2)} s; ${first.kept} kept of ${first.accepted}`,
  });
  report.add({
    name: "its peak memory",
    on,
    unit: "MB",
    must: 350,
    aim: 220,
    now: of((answer) => answer.peak) / 1e6,
    ratio: null,
    note: `coordinates alone ${((24 * 84 * first.accepted) / 1e6).toFixed(0)} MB`,
  });
  const none = processes(report, "set", made.file, { runs: 1 });
  report.add({
    name: "the same without energy tolerance",
    on: made.what,
    unit: "s",
    must: null,
    aim: null,
    now: none.first.cpu,
    ratio: null,
    note: `${none.first.kept} kept, ${none.first.pairs} pairs, sift ${none.first.sifts[0]!.toFixed(2)} s`,
  });
  readingRow(report, made, yardstick, runs);
}

function readingRow(report: Report, made: Made, yardstick: Yardstick, runs: number): void {
  const { of } = processes(report, "read", made.file, { runs });
  const speed = made.bytes / 1e6 / of((answer) => answer.reading);
  report.add({
    name: "reading",
    on: `${made.what}, ${(made.bytes / 1e6).toFixed(0)} MB`,
    unit: "MB/s",
    must: 120,
    aim: 300,
    now: speed,
    rising: true,
    ratio: speed / yardstick.reading,
    note: "fresh process, its start left out, compiling counted",
  });
}

/** Rows about many tolerances at once; they only inform. */
export function countRows(report: Report, made: Made, many: Molecule, comments: readonly string[]): void {
  const { count } = many.block;
  const energies = {
    values: Float64Array.from(comments, Number),
    present: new Uint8Array(count).fill(1),
    kcalPerUnit: kcalPer("hartree"),
  };
  for (const energyTolerance of [0.12, null]) {
    const seconds = timed(Math.min(3, report.settings.runs), () => {
      countAgainstTolerance({
        graph: many.graph,
        block: many.block,
        numbers: Int32Array.from({ length: count }, (_, k) => k + 1),
        energies,
        recipe: { window: null, energyTolerance, atoms: "heavy", symmetry: true, mirror: "keep" },
        rmsdTolerances: [0.025, 0.05, 0.075, 0.1, 0.125, 0.15, 0.2, 0.25, 0.3, 0.4, 0.5, 0.75],
        energyFactors: [0.5, 1, 2],
      });
    });
    report.add({
      name: "distinct counts at 12 tolerances",
      on: `${made.what}, ${energyTolerance === null ? "no energy tolerance" : "and at 3 energy tolerances"}`,
      unit: "s",
      must: null,
      aim: null,
      now: median(seconds),
      ratio: null,
    });
  }
}
