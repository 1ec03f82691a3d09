import { and, count, eq, isNull } from "drizzle-orm";
import { db, inTransaction, type Queryable } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { columns, ensembles, outsideStructures } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { mapOutside } from "../../lib/outside/map-outside.ts";
import { nameApart } from "../../lib/outside/name-apart.ts";
import { unusedEnergy } from "../../lib/outside/unused-energy.ts";
import { escapeControls } from "../../lib/text/escape.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { type FormReader, fileBytes } from "../ensembles/read-multipart.server.ts";
import { FileStore } from "../ensembles/store-files.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import type { OutsideData } from "./outside-data.ts";
import { outsideEnergy } from "./outside-energy.ts";
import { OUTSIDE_BYTES, type ReadOutside, readOutside } from "./read-outside.server.ts";

/** More than these beside one ensemble are a screening, not a comparison. */
const MOST_STRUCTURES = 100;

function invalid(field: string, message: string): DomainError {
  return new DomainError("invalid", "The structure was not taken", message, { faults: [{ field, message }] });
}

/** What became of a structure that was sent. */
export interface AddedOutside {
  id: string;
  /** As asked for, or told apart from others of that name. */
  name: string;
  /** In words, where its energy takes no part. */
  unused: string | null;
}

/** Original bytes as they are read, bounded before anything is unpacked. */
async function* bounded(source: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array, void, undefined> {
  let bytes = 0;
  for await (const chunk of source) {
    bytes += chunk.length;
    if (bytes > OUTSIDE_BYTES) {
      const message = `One structure takes at most ${OUTSIDE_BYTES / 2 ** 20} MB. Send the ligand without its surroundings.`;
      throw new DomainError("too-large", "The file is too large", message, {
        faults: [{ field: "file", message }],
      });
    }
    yield chunk;
  }
}

/**
 * Lays a structure from outside beside an ensemble: one `file`, and the fields `name`, `level` ("auto", "none" or an id)
 * and `energy` as typed. It takes no part in any computation of the ensemble.
 *
 * @returns id and name of the structure, and what of it was not used
 * @throws DomainError invalid in words for another molecule, an unreadable file or an energy that is not there; conflict
 *   where there are too many structures
 */
export async function addOutside(options: {
  actor: Actor;
  ensembleId: string;
  form: FormReader;
}): Promise<AddedOutside> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const { form } = options;
  const store = new FileStore(grant.teamId);
  try {
    const fields = new Map<string, string>();
    let taken: { file: string; read: ReadOutside } | null = null;
    for await (const part of form.parts()) {
      if (part.kind === "field") {
        fields.set(part.name, part.value);
        continue;
      }
      if (taken !== null) throw invalid("file", "Send one structure at a time.");
      const file = escapeControls(part.filename).slice(0, 200);
      if (file === "") throw invalid("file", "Choose a file: a crystal or bound pose as XYZ or SDF.");
      const writer = await store.begin(file);
      const bytes = store.keep(file, bounded(fileBytes(part.data)), writer);
      taken = { file, read: await readOutside(file, bytes) };
      // A reader may have had enough before the end; what is kept is the whole file.
      for await (const _ of bytes);
    }
    if (taken === null) throw invalid("file", "Choose a file: a crystal or bound pose as XYZ or SDF.");
    const { file } = taken;
    const { data, unused } = await dataOf(grant.ensembleId, taken.read, fields);
    const asked = fields.get("name")?.trim() ?? "";
    const wanted = asked === "" ? file : escapeControls(asked);
    const id = newId();
    const name = await inTransaction(async (tx) => {
      const name = nameApart(wanted, await namesTaken(tx, grant.ensembleId));
      const living = and(
        eq(outsideStructures.ensembleId, grant.ensembleId),
        isNull(outsideStructures.deletedAt),
      );
      const [there] = await tx.select({ n: count() }).from(outsideStructures).where(living);
      if ((there?.n ?? 0) >= MOST_STRUCTURES) {
        const message = `${MOST_STRUCTURES} structures lie beside this ensemble already. Delete one first.`;
        throw new DomainError("conflict", "Too many structures", message);
      }
      const [sourceId = ""] = await store.publish(tx);
      await tx.insert(outsideStructures).values({
        id,
        ensembleId: grant.ensembleId,
        name,
        sourceId,
        data,
        createdBy: grant.userId,
        createdAt: new Date(),
      });
      await writeEntry(tx, grant, grant, { type: "outside-added", data: { name, file } });
      return name;
    });
    await store.discard();
    return { id, name, unused };
  } catch (error) {
    await store.discard();
    await form.drain();
    throw error;
  }
}

/** Names of the structures beside an ensemble, those that can be brought back too; one structure is named at a time. */
async function namesTaken(tx: Queryable, ensembleId: string): Promise<ReadonlySet<string>> {
  await tx.select({ id: ensembles.id }).from(ensembles).where(eq(ensembles.id, ensembleId)).for("update");
  const rows = await tx
    .select({ name: outsideStructures.name })
    .from(outsideStructures)
    .where(eq(outsideStructures.ensembleId, ensembleId));
  return new Set(rows.map(({ name }) => name));
}

async function dataOf(
  ensembleId: string,
  { frame, bonds, remarks }: ReadOutside,
  fields: ReadonlyMap<string, string>,
): Promise<{ data: OutsideData; unused: string | null }> {
  const rows = await db
    .select({ atoms: ensembles.atoms, elements: ensembles.elements, bonds: ensembles.bonds })
    .from(ensembles)
    .where(eq(ensembles.id, ensembleId));
  if (rows[0] === undefined) throw notFound();
  const graph = unpackMolecule(rows[0]);
  const levels = await db
    .select({ id: columns.id, name: columns.name, unit: columns.unit, origin: columns.origin })
    .from(columns)
    .where(and(eq(columns.ensembleId, ensembleId), eq(columns.kind, "energy")))
    .orderBy(columns.ordinal);
  const mapping = mapOutside(graph, { elements: frame.elements, bonds });
  if ("refused" in mapping) throw invalid("file", mapping.refused);
  const energy = outsideEnergy(frame, levels, {
    level: fields.get("level") ?? "auto",
    typed: fields.get("energy") ?? "",
  });
  const data: OutsideData = {
    elements: [...frame.elements],
    positions: [...frame.positions],
    bonds: [...bonds],
    map: [...mapping.map],
    atoms: mapping.atoms,
    remarks: [...remarks, ...mapping.remarks],
    energy,
  };
  const unused = unusedEnergy(
    data,
    levels.find(({ id }) => id === energy?.levelId),
  );
  return { data, unused };
}
