import { diamine, fixtureMolecule, type Molecule } from "./inputs.ts";
import { PairBench } from "./pairs.ts";
import type { Report } from "./report.ts";

/** Rows about one pair. */
export function pairRows(report: Report, base: Molecule): void {
  exactRow(report, base);
  plainRows(report, base);
  hydrogenRows(report);
}

function exactRow(report: Report, base: Molecule): void {
  const exact = new PairBench(base, "heavy", { symmetry: true, pairs: 3000 });
  const seconds = exact.exact(report.settings.runs);
  report.add({
    name: "exact symmetric RMSD, a pair",
    on: exact.describe(),
    unit: "us",
    must: 40,
    aim: 15,
    now: 1e6 * seconds,
    ratio: exact.yardstick(2 * exact.plan.chain.order) / seconds,
  });
  report.add({
    name: "exact minimum against brute force",
    on: `${exact.describe()}, 12 pairs`,
    unit: "A^2",
    must: 1e-9,
    aim: null,
    now: exact.largestError(12),
    ratio: null,
    note: "largest difference of RMSD^2",
  });
}

function plainRows(report: Report, base: Molecule): void {
  const { runs } = report.settings;
  const byIndex = new PairBench(base, "heavy", { symmetry: false, pairs: 200_000 });
  const slow = byIndex.yardstick(2000);
  for (const lanes of [true, false]) {
    const seconds = lanes ? byIndex.inLanes(runs, report.kernel) : byIndex.plain(runs);
    report.add({
      name: `RMSD without symmetry, a pair${lanes ? "" : ", in TypeScript"}`,
      on: `${base.name}, ${byIndex.plan.n} atoms`,
      unit: "ns",
      must: 400,
      aim: lanes ? 60 : null,
      now: 1e9 * seconds,
      ratio: slow / seconds,
      note: lanes ? "in rows, WebAssembly, the same bits" : "",
    });
  }
}

function hydrogenRows(report: Report): void {
  const { settings } = report;
  const ethers = ["aryl-ether", "aminoester"].map((name) => fixtureMolecule(settings, name));
  for (const molecule of [diamine(), ...ethers]) {
    const all = new PairBench(molecule, "all", { symmetry: true, pairs: 400 });
    const seconds = all.exact(settings.runs);
    report.add({
      name: "all-atom RMSD with hydrogens, a pair",
      on: all.describe(),
      unit: "us",
      must: 2000,
      aim: 200,
      now: 1e6 * seconds,
      ratio: all.yardstick(1000) / seconds,
      note: "yardstick scaled up from 1,000 mappings",
    });
  }
}
