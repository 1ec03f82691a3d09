import { packedLength } from "../../app/lib/align/pair-matrix.ts";
import { median } from "./clock.ts";
import type { Molecule } from "./inputs.ts";
import { runMatrix } from "./matrix.ts";
import type { Report } from "./report.ts";

const COUNT = 5000;
/** Conformers from whose matrix that with symmetry is scaled up. */
const FEW = 500;

/** Rows about pair matrices, filled by two threads. */
export async function matrixRows(report: Report, many: Molecule, kabsch: number): Promise<void> {
  for (const kernel of [report.kernel, null]) {
    const runs = [];
    for (let k = 0; k < Math.min(3, report.settings.runs); k++) {
      runs.push(await runMatrix(many, { count: COUNT, threads: 2, symmetry: false, kernel }));
    }
    const cpu = median(runs.map((run) => run.cpu));
    const wall = median(runs.map((run) => run.wall));
    report.add({
      name: `full pair matrix of 5,000, both cores${kernel ? "" : ", in TypeScript"}`,
      on: `${many.name}, 12.5M pairs of heavy atoms by index`,
      unit: "s",
      must: 3,
      aim: kernel ? 0.5 : null,
      now: cpu / 2,
      ratio: (kabsch * packedLength(COUNT)) / cpu,
      note: `processor time of both threads, halved; wall ${wall.toFixed(2)} s; threads' start included`,
    });
  }
  const run = await runMatrix(many, { count: FEW, threads: 2, symmetry: true, kernel: report.kernel });
  report.add({
    name: "the same with symmetry, for 5,000",
    on: `${many.name}, scaled up from ${FEW} conformers`,
    unit: "s",
    must: null,
    aim: null,
    now: (run.cpu / 2) * (packedLength(COUNT) / packedLength(FEW)),
    ratio: null,
    note: "halved processor time; exact over all exchanges",
  });
}
