import "../../scripts/lib/engine.mjs";
import { createReadStream, statSync } from "node:fs";
import { FrameClassifier } from "../../app/lib/intake/classify.ts";
import { EnergyScan } from "../../app/lib/intake/energies.ts";
import type { SiftRecipe } from "../../app/lib/recipe/recipe.ts";
import { runSift, type SiftInput } from "../../app/lib/recipe/run.ts";
import { weigh } from "../../app/lib/thermo/boltzmann.ts";
import { kcalPer } from "../../app/lib/units.ts";
import { XyzReader } from "../../app/lib/xyz.server.ts";
import { processor } from "./clock.ts";
import { FrameStore } from "./frame-store.ts";

/**
 * The process behind rows that include its start, with the settings of the engine that the product runs with: streams a file through the product's own reader, classifier and
 * energy scan, sifts the accepted frames, weighs the kept ones, and prints as JSON what that took.
 *
 * Arguments: "set" or "read" (the reader alone), the file, energy tolerance in kcal/mol or "none", number of sifts.
 */
export interface TextToSetAnswer {
  frames: number;
  accepted: number;
  kept: number;
  pairs: number;
  /** Population of the lowest conformer: shows that the weights were worked out. */
  population: number;
  /** Processor seconds: from the start of the process to the populations; of the reading; of each sift. */
  cpu: number;
  reading: number;
  sifts: number[];
  /** Seconds from the start of the process. */
  wall: number;
  /** Highest resident memory in bytes. */
  peak: number;
}

const recipeOf = (tolerance: string): SiftRecipe => ({
  version: 1,
  level: "level",
  levelName: "level",
  window: null,
  energyTolerance: tolerance === "none" ? null : Number(tolerance),
  rmsdTolerance: 0.15,
  atoms: "heavy",
  symmetry: true,
  mirror: "keep",
  chirality: "chiral",
  chiralityOverridden: false,
});

async function textToSet(file: string, tolerance: string, sifts: number): Promise<TextToSetAnswer> {
  const started = processor();
  const input = await readInput(file, recipeOf(tolerance));
  const read = processor();
  const result = runSift(input);
  const first = processor() - read;
  const { populations } = weigh(
    result.kept.map((conformer) => conformer.relativeEnergy ?? 0),
    result.kept.map((conformer) => conformer.copies ?? conformer.degeneracy),
    298.15,
  );
  const whole = { cpu: processor(), wall: performance.now() / 1000 };
  const again = Array.from({ length: sifts - 1 }, () => {
    const from = processor();
    runSift(input);
    return processor() - from;
  });
  return {
    frames: input.frames,
    accepted: input.numbers.length,
    kept: result.kept.length,
    pairs: result.pairsExamined,
    population: populations[0]!,
    ...whole,
    reading: read - started,
    sifts: [first, ...again],
    peak: 1024 * process.resourceUsage().maxRSS,
  };
}

async function* chunksOf(file: string): AsyncGenerator<{ chunk: Uint8Array; share: number }> {
  const { size } = statSync(file);
  let read = 0;
  for await (const chunk of createReadStream(file, { highWaterMark: 1 << 18 })) {
    read += chunk.length;
    yield { chunk, share: read / size };
  }
}

async function readInput(file: string, recipe: SiftRecipe): Promise<SiftInput & { frames: number }> {
  const reader = new XyzReader({ file });
  const classifier = new FrameClassifier();
  const scan = new EnergyScan();
  const store = new FrameStore();
  let frames = 0;
  const take = (found: ReturnType<XyzReader["push"]>, share: number): void => {
    // A little more than the share of the file that is read lets expect; memory is used where it is written only.
    const expected = Math.min(100_000, (1.05 * (frames + found.length + 1)) / share);
    for (const frame of found) {
      if (frame.problem) throw new Error(frame.problem.message);
      const { number, line, elements, isotopes, positions, charge, multiplicity, comment } = frame;
      classifier.add({
        frame: number,
        file,
        line,
        elements,
        isotopes,
        positions,
        charge,
        multiplicity,
        energy: comment,
      });
      scan.add(frame, comment);
      store.add(positions, expected);
      frames += 1;
    }
  };
  for await (const { chunk, share } of chunksOf(file)) take(reader.push(chunk), share);
  take(reader.end(), 1);
  const { graph, frames: verdicts } = classifier.finish();
  const column = scan.finish().chosen?.column;
  if (!graph || !column) throw new Error("No molecule, or no energy, was found.");
  const rows = verdicts.flatMap(({ state }, row) => (state === "held" ? [] : [row]));
  return {
    frames,
    graph,
    block: store.take(rows),
    numbers: Int32Array.from(rows, (row) => row + 1),
    energies: {
      values: Float64Array.from(rows, (row) => column.values[row]!),
      present: Uint8Array.from(rows, (row) => column.present[row]!),
      kcalPerUnit: kcalPer("hartree"),
    },
    recipe,
  };
}

/** The reader alone, from the moment the process is ready. */
async function readOnly(file: string): Promise<TextToSetAnswer> {
  const started = processor();
  const reader = new XyzReader({ file });
  let frames = 0;
  for await (const { chunk } of chunksOf(file)) frames += reader.push(chunk).length;
  frames += reader.end().length;
  const cpu = processor();
  return {
    frames,
    accepted: 0,
    kept: 0,
    pairs: 0,
    population: 0,
    cpu,
    reading: cpu - started,
    sifts: [],
    wall: performance.now() / 1000,
    peak: 1024 * process.resourceUsage().maxRSS,
  };
}

const [mode, file, tolerance, sifts] = process.argv.slice(2) as [string, string, string, string];
const answer = mode === "read" ? await readOnly(file) : await textToSet(file, tolerance, Number(sifts));
console.log(JSON.stringify(answer));
