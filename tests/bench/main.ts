import { execFileSync } from "node:child_process";
import { existsSync, readFileSync } from "node:fs";
import { cpus, loadavg } from "node:os";
import path from "node:path";
import { countAgainstTolerance } from "../../app/lib/sift/count-against-tolerance.ts";
import { readXyz } from "../factories/read-xyz.ts";
import { median, processor, timed } from "./clock.ts";
import {
  diamine,
  fixtureMolecule,
  type Made,
  type Molecule,
  makeLong,
  makeSymmetric,
  type Places,
  symmetricMolecule,
} from "./inputs.ts";
import { runMatrix } from "./matrix.ts";
import { PairBench } from "./pairs.ts";
import { type Row, tableOf, verdict } from "./table.ts";
import type { TextToSetAnswer } from "./text-to-set.ts";

/**
 * Every figure of the performance page, with the ratio to a straightforward implementation (Kabsch by SVD, brute force
 * over mappings, a reader by split and Number) timed in the same run. Started by scripts/bench.mjs.
 */

const KCAL = 627.50947406;

interface Settings extends Places {
  runs: number;
  json: boolean;
  only: string | null;
}

class Bench {
  private readonly rows: Row[] = [];
  private readonly kernel: WebAssembly.Module;

  constructor(private readonly settings: Settings) {
    this.kernel = new WebAssembly.Module(readFileSync(path.join(settings.scratch, "kernel.wasm")));
  }

  async run(): Promise<void> {
    const { settings } = this;
    const base = symmetricMolecule(settings);
    if (base.name !== "M") {
      this.say("../shared/reference is not there: fixtures/reference stands in for its large ensembles.");
    }
    if (this.wants("pairs")) this.pairs(base);
    const made = makeSymmetric(settings, base, 10_000);
    const slow = processor();
    const read = readXyz(made.file);
    const yardstickReading = made.bytes / 1e6 / (processor() - slow);
    const many: Molecule = { ...base, block: read.block };
    const kabsch = new PairBench(base, "heavy", { symmetry: false, pairs: 2000 }).yardstick(2000);
    if (this.wants("sets")) this.symmetricSets(made, base, yardstickReading);
    if (this.wants("counts")) this.counts(made, many, read.comments);
    if (this.wants("matrix")) await this.matrices(many, kabsch);
    if (this.wants("long")) this.long(yardstickReading, kabsch);
    if (settings.json) console.log(JSON.stringify({ ...machine(), rows: this.rows }, null, 2));
    else {
      const { processor: name, cores, node, load } = machine();
      console.log(`\n${name}, ${cores} cores, Node ${node}, load ${load.join(" ")} at the end\n`);
      console.log(tableOf(this.rows));
    }
    if (this.rows.some((row) => verdict(row) === "NO")) process.exitCode = 1;
  }

  private wants(part: string): boolean {
    return this.settings.only === null || this.settings.only === part;
  }

  private say(text: string): void {
    if (!this.settings.json) console.log(text);
  }

  private add(row: Row): void {
    this.rows.push(row);
    this.say(`${row.name}: ${row.now.toPrecision(3)} ${row.unit} (load ${loadavg()[0]!.toFixed(1)})`);
  }

  private pairs(base: Molecule): void {
    const { runs } = this.settings;
    const exact = new PairBench(base, "heavy", { symmetry: true, pairs: 3000 });
    const seconds = exact.exact(runs);
    this.add({
      name: "exact symmetric RMSD, a pair",
      on: exact.describe(),
      unit: "us",
      must: 40,
      aim: 15,
      now: 1e6 * seconds,
      ratio: exact.yardstick(2 * 864) / seconds,
    });
    const byIndex = new PairBench(base, "heavy", { symmetry: false, pairs: 200_000 });
    const slow = byIndex.yardstick(2000);
    for (const lanes of [true, false]) {
      const each = lanes ? byIndex.inLanes(runs, this.kernel) : byIndex.plain(runs);
      this.add({
        name: `RMSD without symmetry, a pair${lanes ? "" : ", in TypeScript"}`,
        on: `${base.name}, ${byIndex.plan.n} atoms`,
        unit: "ns",
        must: 400,
        aim: lanes ? 60 : null,
        now: 1e9 * each,
        ratio: slow / each,
        note: lanes ? "in rows, WebAssembly, the same bits" : "",
      });
    }
    for (const other of [
      diamine(),
      fixtureMolecule(this.settings, "aryl-ether"),
      fixtureMolecule(this.settings, "aminoester"),
    ]) {
      const all = new PairBench(other, "all", { symmetry: true, pairs: 400 });
      const each = all.exact(runs);
      this.add({
        name: "all-atom RMSD with hydrogens, a pair",
        on: all.describe(),
        unit: "us",
        must: 2000,
        aim: 200,
        now: 1e6 * each,
        ratio: all.yardstick(1000) / each,
        note: "yardstick scaled up from 1,000 mappings",
      });
    }
    this.add({
      name: "exact minimum against brute force",
      on: `${exact.describe()}, 12 pairs`,
      unit: "A^2",
      must: 1e-9,
      aim: null,
      now: exact.largestError(12),
      ratio: null,
    });
  }

  /** Runs the process of a row several times. */
  private processes(mode: "set" | "read", file: string, tolerance: string, sifts: number, runs: number) {
    const script = path.join(this.settings.scratch, "text-to-set.mjs");
    const answers = Array.from({ length: runs }, (): TextToSetAnswer => {
      const text = execFileSync(process.execPath, [script, mode, file, tolerance, String(sifts)]);
      return JSON.parse(text.toString());
    });
    const of = (pick: (answer: TextToSetAnswer) => number) => median(answers.map(pick));
    return { first: answers[0]!, of };
  }

  private symmetricSets(made: Made, base: Molecule, yardstickReading: number): void {
    const { runs } = this.settings;
    const mappings = new PairBench(base, "heavy", { symmetry: true, pairs: 2 }).yardstick(2 * 864);
    const limits = {
      "0.12": { whole: [1.0, 0.5], sift: [0.4, 0.15], words: "e_tol 0.12" },
      none: { whole: [1.5, 0.6], sift: [1.5, 0.6], words: "no energy tolerance" },
    };
    for (const tolerance of ["0.12", "none"] as const) {
      const { whole, sift, words } = limits[tolerance];
      const { first, of } = this.processes("set", made.file, tolerance, 5, runs);
      const slow = first.pairs * mappings;
      const on = `${made.what}, ${words}`;
      this.add({
        name: "XYZ text to distinct set and populations",
        on,
        unit: "s",
        must: whole[0]!,
        aim: whole[1]!,
        now: of((answer) => answer.cpu),
        ratio: (slow + made.bytes / 1e6 / yardstickReading) / of((answer) => answer.cpu),
        note: `process start included; wall ${of((answer) => answer.wall).toFixed(2)} s; ${first.kept} kept of ${first.accepted}; yardstick estimated from a pair`,
      });
      this.add({
        name: "its sift alone",
        on,
        unit: "s",
        must: sift[0]!,
        aim: sift[1]!,
        now: of((answer) => median(answer.sifts.slice(1))),
        ratio: slow / of((answer) => median(answer.sifts.slice(1))),
        note: `again in one process; the first ${of((answer) => answer.sifts[0]!).toFixed(2)} s; ${first.pairs} pairs`,
      });
    }
    const { of } = this.processes("read", made.file, "none", 0, runs);
    this.addReading(
      made,
      of((answer) => answer.reading),
      yardstickReading,
    );
  }

  private addReading(made: Made, seconds: number, yardstick: number): void {
    this.add({
      name: "reading",
      on: `${made.what}, ${(made.bytes / 1e6).toFixed(0)} MB`,
      unit: "MB/s",
      must: 120,
      aim: 300,
      now: made.bytes / 1e6 / seconds,
      rising: true,
      ratio: made.bytes / 1e6 / seconds / yardstick,
      note: "fresh process, its start left out",
    });
  }

  private counts(made: Made, many: Molecule, comments: readonly string[]): void {
    const { count } = many.block;
    const energies = {
      values: Float64Array.from(comments, Number),
      present: new Uint8Array(count).fill(1),
      kcalPerUnit: KCAL,
    };
    for (const energyTolerance of [0.12, null]) {
      const seconds = timed(Math.min(3, this.settings.runs), () => {
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
      this.add({
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

  private async matrices(many: Molecule, kabsch: number): Promise<void> {
    const count = 5000;
    const pairs = (count * (count - 1)) / 2;
    for (const kernel of [this.kernel, null]) {
      const walls: number[] = [];
      const cpu: number[] = [];
      for (let k = 0; k < Math.min(3, this.settings.runs); k++) {
        const run = await runMatrix(many, { count, threads: 2, symmetry: false, kernel });
        walls.push(run.wall);
        cpu.push(run.cpu);
      }
      this.add({
        name: `full pair matrix of 5,000, both cores${kernel ? "" : ", in TypeScript"}`,
        on: `${many.name}, 30 heavy atoms by index, 12.5M pairs`,
        unit: "s",
        must: 3,
        aim: kernel ? 0.5 : null,
        now: median(cpu) / 2,
        ratio: (kabsch * pairs) / median(cpu),
        note: `processor time of both threads, halved; wall ${median(walls).toFixed(2)} s; threads' start included`,
      });
    }
    const few = 500;
    const run = await runMatrix(many, { count: few, threads: 2, symmetry: true, kernel: this.kernel });
    this.add({
      name: "the same with symmetry, for 5,000",
      on: `${many.name}, 864 mappings, from 500 conformers`,
      unit: "s",
      must: null,
      aim: null,
      now: (run.cpu / 2) * (pairs / ((few * (few - 1)) / 2)),
      ratio: null,
      note: "halved processor time, scaled up",
    });
  }

  private long(yardstickReading: number, kabsch: number): void {
    const made = makeLong(this.settings, 50_000);
    const runs = Math.min(3, this.settings.runs);
    const { first, of } = this.processes("set", made.file, "0.12", 1, runs);
    const on = `${made.what}, e_tol 0.12`;
    const note = `wall ${of((answer) => answer.wall).toFixed(2)} s; reading ${of((answer) => answer.reading).toFixed(2)} s, sift ${of((answer) => answer.sifts[0]!).toFixed(2)} s; ${first.kept} kept of ${first.accepted}`;
    const slow = first.pairs * kabsch + made.bytes / 1e6 / yardstickReading;
    this.add({
      name: "text to distinct set, streamed",
      on,
      unit: "s",
      must: 5,
      aim: 2.5,
      now: of((answer) => answer.cpu),
      ratio: slow / of((answer) => answer.cpu),
      note,
    });
    this.add({
      name: "its peak memory",
      on,
      unit: "MB",
      must: 350,
      aim: 220,
      now: of((answer) => answer.peak) / 1e6,
      ratio: null,
    });
    const none = this.processes("set", made.file, "none", 1, 1);
    this.add({
      name: "the same without energy tolerance",
      on: made.what,
      unit: "s",
      must: null,
      aim: null,
      now: none.of((answer) => answer.cpu),
      ratio: null,
      note: `${none.first.kept} kept, ${none.first.pairs} pairs, sift ${none.first.sifts[0]!.toFixed(2)} s`,
    });
    const reader = this.processes("read", made.file, "none", 0, runs);
    this.addReading(
      made,
      reader.of((answer) => answer.reading),
      yardstickReading,
    );
  }
}

function machine() {
  return {
    date: new Date().toISOString().slice(0, 10),
    processor: cpus()[0]?.model.trim() ?? "unknown",
    cores: cpus().length,
    node: process.versions.node,
    load: loadavg().map((value) => Number(value.toFixed(1))),
  };
}

const [root, scratch, ...flags] = process.argv.slice(2) as [string, string, ...string[]];
const flagOf = (name: string) => flags.find((flag) => flag.startsWith(`--${name}=`))?.split("=")[1] ?? null;
if (!existsSync(path.join(root, "fixtures"))) throw new Error(`${root} is no checkout.`);
await new Bench({
  root,
  scratch,
  runs: Number(flagOf("runs") ?? 5),
  json: flags.includes("--json"),
  only: flagOf("only"),
}).run();
