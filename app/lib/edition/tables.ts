import { numberCell, textCell } from "../export/csv.ts";
import { conformerName } from "../workbench/conformers.ts";
import type { EditionContent } from "./content.ts";

/** Energy of a frame that took part, in the unit of the level, as stored; null where it has none. */
export interface FrameEnergy {
  frame: number;
  energy: number | null;
}

const LINE_END = "\r\n";
const row = (cells: readonly string[]) => cells.join(",") + LINE_END;

/**
 * `temperatures.csv`: one row a quantity, one column a temperature in K, every digit, after RFC 4180.
 *
 * @example [...temperaturesCsv(content, temperatures)][0] // "kind,name,frame,unit,rule,253 K,298.15 K,323 K\r\n"
 */
export function* temperaturesCsv(
  content: EditionContent,
  temperatures: NonNullable<EditionContent["temperatures"]>,
): Generator<string> {
  const { kelvin, thermo, populations, averages } = temperatures;
  yield row(["kind", "name", "frame", "unit", "rule", ...kelvin.map((temperature) => `${temperature} K`)]);
  for (const [k, { frame }] of content.kept.entries()) {
    const values = populations.map((shares) => numberCell(shares[k] ?? null));
    yield row(["population", conformerName(k), numberCell(frame), "", "", ...values]);
  }
  const figures = [
    ["free energy", "kcal/mol", "freeEnergy"],
    ["mean energy", "kcal/mol", "energy"],
    ["entropy", "cal/(mol K)", "entropy"],
    ["effective number", "", "effectiveCount"],
  ] as const;
  for (const [name, unit, key] of figures) {
    yield row(["ensemble", name, "", unit, "", ...thermo.map((one) => numberCell(one[key]))]);
  }
  for (const [k, { property, unit, rule }] of (content.averages ?? []).entries()) {
    const values = averages.map((list) => numberCell(list[k] ?? null));
    yield row(["average", textCell(property), "", textCell(unit ?? ""), rule, ...values]);
  }
}

/**
 * `frames.csv`: what became of every frame, with the energy that it took part with: enough to run the sift again.
 *
 * @example [...framesCsv(content, energies)][1] // "1,kept,c1,,,-12.5\r\n"
 */
export function* framesCsv(content: EditionContent, energies: readonly FrameEnergy[]): Generator<string> {
  const unit = content.level ? ` [${content.level.unit}]` : "";
  yield row(["frame", "state", "conformer", "repeats", "rmsd [Å]", textCell(`energy${unit}`)]);
  const places = new Map(content.kept.map(({ frame }, k) => [frame, conformerName(k)]));
  const dropped = new Map(content.dropped.map((one) => [one.frame, one]));
  const outside = new Set(content.outsideWindow);
  const held = new Set(content.held.map(({ frame }) => frame));
  const energyOf = new Map(energies.map(({ frame, energy }) => [frame, energy]));
  const frames = [...new Set([...energyOf.keys(), ...held])].sort((a, b) => a - b);
  for (const frame of frames) {
    const repeat = dropped.get(frame);
    const conformer = places.get(frame) ?? (repeat ? places.get(repeat.repeats) : undefined);
    const state = places.has(frame)
      ? "kept"
      : repeat
        ? "repeat"
        : outside.has(frame)
          ? "above the window"
          : held.has(frame)
            ? "held"
            : "without energy";
    yield row([
      numberCell(frame),
      state,
      conformer ?? "",
      numberCell(repeat?.repeats ?? null),
      numberCell(repeat?.rmsd ?? null),
      numberCell(energyOf.get(frame) ?? null),
    ]);
  }
}

/**
 * Energies of the frames that took part, read back from `frames.csv`.
 *
 * @throws RangeError on a line that the file cannot have
 */
export function readFrameEnergies(csv: string): FrameEnergy[] {
  return csv
    .split(LINE_END)
    .slice(1)
    .filter((line) => line !== "")
    .flatMap((line) => {
      const cells = line.split(",");
      if (cells.length !== 6 || !/^\d+$/.test(cells[0] ?? "")) throw new RangeError(`“${line}” is no frame.`);
      if (cells[1] === "held") return [];
      return [{ frame: Number(cells[0]), energy: cells[5] === "" ? null : Number(cells[5]) }];
    });
}
