import { eq } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../../db/client.server.ts";
import { columns, ensembles, sifts } from "../../../db/schema.server.ts";
import { unpackColumn } from "../../../lib/column-data.ts";
import { DomainError } from "../../../lib/errors.ts";
import { ENERGY_UNITS, type EnergyUnit, kcalPer } from "../../../lib/units.ts";
import type { SiftTask } from "../../../workers/protocol.ts";
import { acceptedFrames, acceptedSha, siftInputSha } from "../../ensembles/accepted-frames.server.ts";
import { loadPositions } from "../../ensembles/load-positions.server.ts";
import { unpackMolecule } from "../../ensembles/molecule.server.ts";
import { finishSift } from "../../sifts/finish-sift.server.ts";
import { siftJob } from "../definitions/sift.ts";
import { type JobRun, JobStopped } from "../job-run.ts";
import { computeSift } from "../pool.server.ts";

type Input = Omit<SiftTask, "kind" | "port" | "cancel">;

const CHANGED =
  "Frames or energies changed before this sift began, so it would not have answered what was asked. Ask for it again.";

function energyUnit(unit: string | null): EnergyUnit {
  const known = ENERGY_UNITS.find((one) => one === unit);
  if (known === undefined) throw new Error(`A level has the unit ${unit}, which is no unit of energy.`);
  return known;
}

/** Everything the computation needs, from one snapshot, checked to be what the sift was asked on. */
async function loadInput(tx: Transaction, siftId: string): Promise<Input> {
  const rows = await tx
    .select({ recipe: sifts.recipe, inputSha: sifts.inputSha, ensemble: ensembles })
    .from(sifts)
    .innerJoin(ensembles, eq(ensembles.id, sifts.ensembleId))
    .where(eq(sifts.id, siftId));
  const row = rows[0];
  if (row === undefined) throw new Error(`Sift ${siftId} is gone.`);
  const { ensemble, recipe } = row;
  const levels =
    recipe.level === null ? [] : await tx.select().from(columns).where(eq(columns.id, recipe.level));
  const level = levels[0] ?? null;
  const numbers = level && { dataSha: level.dataSha ?? Buffer.alloc(32), unit: level.unit };
  const inputSha = siftInputSha(await acceptedSha(tx, ensemble.id), numbers);
  if ((recipe.level !== null && level === null) || !inputSha.equals(row.inputSha ?? Buffer.alloc(0))) {
    throw new DomainError("conflict", "The ensemble changed", CHANGED);
  }
  const accepted = await acceptedFrames(ensemble.id, tx);
  const graph = unpackMolecule(ensemble);
  return {
    elements: graph.elements,
    isotopes: graph.isotopes,
    bonds: graph.bonds,
    atoms: ensemble.atoms,
    positions: await loadPositions(ensemble.id, ensemble.atoms, accepted.indices, tx),
    numbers: accepted.numbers,
    energies: level && energiesOf(level, ensemble.frames, accepted.numbers),
    recipe,
  };
}

function energiesOf(level: typeof columns.$inferSelect, frames: number, numbers: Int32Array) {
  const all = unpackColumn(level.data, frames);
  const values = new Float64Array(numbers.length);
  const present = new Uint8Array(numbers.length);
  for (const [row, number] of numbers.entries()) {
    values[row] = all.values[number - 1] ?? 0;
    present[row] = all.present[number - 1] ?? 0;
  }
  return { values, present, kcalPerUnit: kcalPer(energyUnit(level.unit)) };
}

/** Loads, computes in a thread, stores. */
export async function runSiftJob(run: JobRun): Promise<void> {
  const { siftId } = siftJob.payload.parse(run.payload);
  const input = await inTransaction((tx) => loadInput(tx, siftId));
  const answer = await computeSift(
    { ...input, cancel: run.cancel },
    { progress: run.progress, signal: run.signal },
  );
  if (answer.kind === "cancelled") throw new JobStopped(`Sift ${siftId} was stopped.`);
  await finishSift({ siftId, jobId: run.jobId, holder: run.holder, result: answer.result });
}
