import { eq } from "drizzle-orm";
import { z } from "zod";
import { db, inTransaction } from "../../db/client.server.ts";
import { ensembles } from "../../db/schema.server.ts";
import { atomName } from "../../lib/chem/elements.ts";
import { refineColours } from "../../lib/chem/signature.ts";
import { DomainError } from "../../lib/errors.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { lockEnsemble, touchEnsemble } from "../columns/store-column.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { findAveraging, storeAveraging } from "./averaging.server.ts";

const MOST_SPLITS = 100;
const partsSchema = z.array(z.array(z.number().int().min(1)).min(1)).min(2);

function refused(field: string, message: string): DomainError {
  return new DomainError("invalid", "The group was not changed", message, { faults: [{ field, message }] });
}

async function moleculeOf(ensembleId: string) {
  const [row] = await db
    .select({ atoms: ensembles.atoms, elements: ensembles.elements, bonds: ensembles.bonds })
    .from(ensembles)
    .where(eq(ensembles.id, ensembleId));
  if (row === undefined) throw notFound();
  return unpackMolecule(row);
}

/**
 * Takes a group of equivalent atoms apart: a rotor that turns more slowly than the experiment looks (an amide nitrogen, a
 * hindered ring) gives a signal a part. Holds for every per-atom quantity of the ensemble; in the logbook.
 *
 * @param options.parts atoms from 1, a list a signal
 * @throws DomainError invalid for atoms that are none, named twice, or that the bonds tell apart anyway; conflict where
 *   there are too many such groups
 */
export async function splitAtoms(options: {
  actor: Actor;
  ensembleId: string;
  parts: readonly (readonly number[])[];
}): Promise<void> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const graph = await moleculeOf(grant.ensembleId);
  const read = partsSchema.safeParse(options.parts);
  const atoms = read.success ? read.data.flat() : [];
  if (!read.success || atoms.some((atom) => atom > graph.elements.length)) {
    throw refused(
      "parts",
      "Choose how the atoms of one group part: two signals at least, each with an atom of it.",
    );
  }
  if (new Set(atoms).size < atoms.length) throw refused("parts", "An atom can stand in one part only.");
  const colours = refineColours(graph);
  const apart = atoms.find((atom) => colours[atom - 1] !== colours[(atoms[0] ?? 0) - 1]);
  const nameOf = (atom: number) => atomName(graph.elements, atom - 1);
  if (apart !== undefined) {
    throw refused("parts", `${nameOf(apart)} and ${nameOf(atoms[0] ?? 1)} are no equivalent atoms.`);
  }
  const parts = read.data.map((part) => [...part].sort((a, b) => a - b));
  parts.sort((a, b) => (a[0] ?? 0) - (b[0] ?? 0));
  await inTransaction(async (tx) => {
    await lockEnsemble(tx, grant);
    const { data, version } = await findAveraging(grant.ensembleId, tx);
    // Asked for twice at the same moment: done once.
    if (data.splits.some((one) => JSON.stringify(one.parts) === JSON.stringify(parts))) return;
    if (data.splits.length >= MOST_SPLITS) {
      const message = `${MOST_SPLITS} groups are taken apart already. Put one together first.`;
      throw new DomainError("conflict", "Too many groups taken apart", message);
    }
    const split = { parts, by: grant.userId, at: new Date().toISOString() };
    await storeAveraging(tx, grant.ensembleId, { ...data, splits: [...data.splits, split] }, version);
    await touchEnsemble(tx, grant.ensembleId);
    await writeEntry(tx, grant, grant, {
      type: "atoms-split",
      data: { parts: parts.map((part) => part.map(nameOf)) },
    });
  });
}

/**
 * Puts the parts of a group together again: undoes the last split that names the atom; in the logbook.
 *
 * @param options.atom from 1
 */
export async function joinAtoms(options: { actor: Actor; ensembleId: string; atom: number }): Promise<void> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const graph = await moleculeOf(grant.ensembleId);
  await inTransaction(async (tx) => {
    await lockEnsemble(tx, grant);
    const { data, version } = await findAveraging(grant.ensembleId, tx);
    const last = data.splits.findLastIndex(({ parts }) => parts.some((part) => part.includes(options.atom)));
    const split = data.splits[last];
    // Somebody else has put it together already.
    if (split === undefined) return;
    await storeAveraging(
      tx,
      grant.ensembleId,
      { ...data, splits: data.splits.filter((one) => one !== split) },
      version,
    );
    await touchEnsemble(tx, grant.ensembleId);
    await writeEntry(tx, grant, grant, {
      type: "atoms-joined",
      data: { parts: split.parts.map((part) => part.map((atom) => atomName(graph.elements, atom - 1))) },
    });
  });
}
