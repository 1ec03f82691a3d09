import { z } from "zod";
import { inTransaction } from "../../db/client.server.ts";
import { GENERAL_SET, KARPLUS_SETS, OWN_SET } from "../../lib/averages/karplus.ts";
import {
  firstUnbonded,
  OBSERVABLE_ATOMS,
  OBSERVABLE_UNIT,
  type Observable,
  takesPhi,
  toDefinition,
  whyNotGeneral,
} from "../../lib/averages/observable.ts";
import { observableName } from "../../lib/averages/observable-words.ts";
import type { ParityGroup } from "../../lib/averages/parity-group.ts";
import { atomName } from "../../lib/chem/elements.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Graph } from "../../lib/structure.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import {
  lockEnsemble,
  type StoredColumn,
  storeColumn,
  touchEnsemble,
} from "../columns/store-column.server.ts";
import { findEnsembleRow } from "../ensembles/load-ensemble.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { observableColumn, parityGroupOf } from "./observable-values.server.ts";

/** What is asked for; atoms count from 1, as in the file. */
export const observableRequestSchema = z.strictObject({
  observable: z.enum(["distance", "angle", "torsion", "coupling"]),
  atoms: z.array(z.number().int().positive()).min(2).max(4),
  /** Of a distance. */
  rule: z.enum(["linear", "r-6", "r-3"]).optional(),
  /** Average over equivalent atoms first: a methyl group or a ring side counts as one. */
  merge: z.boolean().default(true),
  /** Of a coupling: a published set, the general one, or "own" with A, B, C in Hz. */
  set: z.string().max(40).optional(),
  own: z.strictObject({ a: z.number().finite(), b: z.number().finite(), c: z.number().finite() }).optional(),
  name: z.string().trim().min(1).max(120).optional(),
});
export type ObservableRequest = z.infer<typeof observableRequestSchema>;

function refused(field: string, message: string): DomainError {
  return new DomainError("invalid", "It cannot become a column", message, { faults: [{ field, message }] });
}

function checkAtoms(request: ObservableRequest, atoms: number): void {
  const wanted = OBSERVABLE_ATOMS[request.observable];
  if (request.atoms.length !== wanted || new Set(request.atoms).size !== wanted) {
    throw refused(
      "atoms",
      `A ${request.observable} takes ${wanted} different atoms, found ${request.atoms.length}.`,
    );
  }
  const beyond = request.atoms.find((atom) => atom > atoms);
  if (beyond !== undefined)
    throw refused("atoms", `The molecule has ${atoms} atoms; there is no atom ${beyond}.`);
}

function checkSet(request: ObservableRequest, graph: Graph, path: readonly number[]): void {
  if (request.observable !== "coupling") return;
  const known = [GENERAL_SET, OWN_SET, ...KARPLUS_SETS.map((set) => set.id)];
  if (request.set === undefined || !known.includes(request.set)) {
    throw refused("set", `Choose a parameter set: ${known.join(", ")}.`);
  }
  if (request.set === OWN_SET && request.own === undefined) {
    throw refused("own", "Give A, B and C of J = A cos²t + B cos t + C, in Hz.");
  }
  const open = firstUnbonded(graph, path);
  if (open !== null) {
    const names = open.map((atom) => atomName(graph.elements, atom)).join(" and ");
    throw refused(
      "atoms",
      `A coupling over three bonds takes four atoms bonded in a row; ${names} are not bonded.`,
    );
  }
  const why = request.set === GENERAL_SET ? whyNotGeneral(graph, path) : null;
  if (why !== null) throw refused("set", `The general H–C–C–H set does not fit these atoms. ${why}`);
}

function tuplesOf(
  request: ObservableRequest,
  path: readonly number[],
  group: ParityGroup | null,
): number[][] {
  const merges = request.observable === "distance" || request.observable === "coupling";
  if (!merges || !request.merge || group === null) return [[...path]];
  const orbit = group.orbit(path);
  if (orbit === null) {
    throw refused(
      "merge",
      "Too many equivalent pairs stand behind these atoms. Take them without their equivalents.",
    );
  }
  return orbit;
}

/** These very atoms, where they have equivalent ones that are not to be averaged in. */
const alone = (request: ObservableRequest, path: readonly number[], group: ParityGroup | null) =>
  (request.observable === "distance" || request.observable === "coupling") &&
  !request.merge &&
  group?.orbit(path)?.length !== 1;

/**
 * Makes a distance, angle, torsion or coupling of picked atoms a property column, computed from the stored coordinates
 * of every frame; in the logbook.
 *
 * @throws DomainError invalid (422) for atoms or a parameter set that do not fit, conflict (409) where the name is taken
 */
export async function addObservable(options: {
  actor: Actor;
  ensembleId: string;
  request: ObservableRequest;
}): Promise<StoredColumn> {
  const { request } = options;
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const { ensemble } = await findEnsembleRow(grant.teamId, grant.ensembleId);
  checkAtoms(request, ensemble.atoms);
  const path = request.atoms.map((atom) => atom - 1);
  const graph = unpackMolecule(ensemble);
  checkSet(request, graph, path);
  const group = await parityGroupOf(ensemble);
  const observable: Observable = {
    kind: request.observable,
    tuples: tuplesOf(request, path, group),
    rule: ruleFor(request),
    set: request.observable === "coupling" ? (request.set ?? null) : null,
    own: request.set === OWN_SET ? (request.own ?? null) : null,
    ...(request.observable === "coupling" && takesPhi(request.set ?? null, graph, path)
      ? { angle: "phi" as const }
      : {}),
    ...(alone(request, path, group) ? { numbered: "file" as const } : {}),
  };
  const name = request.name ?? observableName(observable, graph.elements);
  const at = { teamId: grant.teamId, ensembleId: grant.ensembleId, userId: grant.userId };
  return inTransaction(async (tx) => {
    // Locked before the frames are read: a further batch waits until its own turn to compute.
    const locked = await lockEnsemble(tx, at);
    const data = await observableColumn({ ...ensemble, frames: locked.frames }, observable, group, tx);
    const stored = await storeColumn(tx, at, {
      name,
      kind: "property",
      unit: OBSERVABLE_UNIT[observable.kind],
      data,
      origin: "observable",
      rule: observable.rule as "linear" | "r-6" | "r-3" | "circular",
      definition: toDefinition(observable),
    });
    await touchEnsemble(tx, at.ensembleId);
    await writeEntry(tx, grant, grant, {
      type: "columns-added",
      data: {
        from: "atoms picked on the structure",
        sha256: null,
        columns: [
          {
            id: stored.id,
            name,
            kind: "property",
            unit: OBSERVABLE_UNIT[observable.kind],
            count: data.present.reduce((sum, flag) => sum + flag, 0),
            replaced: stored.replaced,
          },
        ],
        matched: "computed in every frame",
        answers: { atoms: request.atoms.join(", "), rule: observable.rule },
      },
    });
    return stored;
  });
}

/** Valence angles never leave 0 to 180 degrees: a plain mean is right for them, and the same in both hands. */
function ruleFor(request: ObservableRequest): Observable["rule"] {
  if (request.observable === "distance") return request.rule ?? "linear";
  return request.observable === "torsion" ? "circular" : "linear";
}
