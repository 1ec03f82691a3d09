import { readFileSync } from "node:fs";
import { cpus, loadavg } from "node:os";
import path from "node:path";
import type { Places } from "./inputs.ts";
import { type Row, tableOf, verdict } from "./table.ts";

export interface Settings extends Places {
  runs: number;
  json: boolean;
  /** The one part to run, or null. */
  only: string | null;
}

/** Gathers rows while they are measured, and shows them. */
export class Report {
  readonly rows: Row[] = [];
  readonly kernel: WebAssembly.Module;

  constructor(readonly settings: Settings) {
    this.kernel = new WebAssembly.Module(readFileSync(path.join(settings.scratch, "kernel.wasm")));
  }

  wants(part: string): boolean {
    return this.settings.only === null || this.settings.only === part;
  }

  say(text: string): void {
    if (!this.settings.json) console.log(text);
  }

  add(row: Row): void {
    this.rows.push(row);
    this.say(`${row.name}: ${row.now.toPrecision(3)} ${row.unit} (load ${loadavg()[0]!.toFixed(1)})`);
  }

  /** Prints everything; returns false where a "must" is missed. */
  finish(): boolean {
    const machine = {
      date: new Date().toISOString().slice(0, 10),
      processor: cpus()[0]?.model.trim() ?? "unknown",
      cores: cpus().length,
      node: process.versions.node,
      load: loadavg().map((value) => Number(value.toFixed(1))),
    };
    if (this.settings.json) console.log(JSON.stringify({ ...machine, rows: this.rows }, null, 2));
    else {
      const { date, processor, cores, node, load } = machine;
      console.log(
        `\n${date}, ${processor}, ${cores} cores, Node ${node}, load ${load.join(" ")} at the end\n`,
      );
      console.log(tableOf(this.rows));
    }
    return this.rows.every((row) => verdict(row) !== "NO");
  }
}
