import { and, asc, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { batches, ensembleFiles, ensembles, series, sources, teams } from "../../db/schema.server.ts";
import { looksLikeLevel } from "../../lib/columns-view.ts";
import type { Graph } from "../../lib/structure.ts";
import { escapeControls } from "../../lib/text/escape.ts";
import type { EnsembleView, FileView } from "../../lib/views.ts";
import { type Actor, accessEnsemble, roleMay } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { frameStrip } from "./accepted-frames.server.ts";
import { findColumns, toLevels } from "./find-columns.server.ts";
import { unpackMolecule } from "./molecule.server.ts";

/** The files of an ensemble in the order of their frames. */
export async function findFiles(ensembleId: string): Promise<FileView[]> {
  const rows = await db
    .select({
      position: ensembleFiles.position,
      name: ensembleFiles.name,
      entry: ensembleFiles.entry,
      batch: ensembleFiles.batch,
      format: ensembleFiles.format,
      sha256: sources.sha256,
      bytes: sources.bytes,
      firstFrame: ensembleFiles.firstFrame,
      frames: ensembleFiles.frames,
    })
    .from(ensembleFiles)
    .innerJoin(sources, eq(sources.id, ensembleFiles.sourceId))
    .where(eq(ensembleFiles.ensembleId, ensembleId))
    .orderBy(asc(ensembleFiles.position));
  return rows.map(({ name, entry, batch, sha256, ...row }) => ({
    ...row,
    name: entry ?? name,
    archive: entry === null ? null : name,
    batch: batch + 1,
    sha256: sha256?.toString("hex") ?? "",
  }));
}

/** Files with the names of the searches that brought them, as pages show them. */
async function findNamedFiles(ensembleId: string): Promise<FileView[]> {
  const [files, rows] = await Promise.all([
    findFiles(ensembleId),
    db
      .select({ batch: batches.batch, name: batches.name })
      .from(batches)
      .where(eq(batches.ensembleId, ensembleId)),
  ]);
  const names = new Map(rows.map(({ batch, name }) => [batch + 1, name]));
  return files.map((file) => {
    const name = names.get(file.batch);
    return name ? { ...file, batchName: name } : file;
  });
}

/** The row of a living ensemble with the names around it, bound to the team of the grant. */
export async function findEnsembleRow(teamId: string, ensembleId: string) {
  const rows = await db
    .select({
      ensemble: ensembles,
      team: { id: teams.id, name: teams.name },
      series: { id: series.id, name: series.name },
    })
    .from(ensembles)
    .innerJoin(teams, eq(teams.id, ensembles.teamId))
    .innerJoin(series, eq(series.id, ensembles.seriesId))
    .where(and(eq(ensembles.id, ensembleId), eq(ensembles.teamId, teamId), isNull(ensembles.deletedAt)))
    .limit(1);
  const row = rows[0];
  if (row === undefined) throw notFound();
  return row;
}

/** Only a table that fits the bonds: they may have been read again since. */
function statedTable(
  table: (typeof ensembles.$inferSelect)["bondTable"],
  { bonds }: Graph,
): EnsembleView["bondTable"] {
  if (table === null || table.orders.length !== bonds.length / 2) return null;
  return { orders: table.orders, charges: table.charges };
}

/** What every page of an ensemble shows around its sections. */
export async function loadEnsemble(options: { actor: Actor; ensembleId: string }): Promise<EnsembleView> {
  const grant = await accessEnsemble(options.actor, "read", options.ensembleId);
  const row = await findEnsembleRow(grant.teamId, grant.ensembleId);
  const { ensemble } = row;
  const [strip, files] = await Promise.all([frameStrip(ensemble.id), findNamedFiles(ensemble.id)]);
  const graph = unpackMolecule(ensemble);
  const columns = await findColumns(ensemble.id, strip);
  return {
    id: ensemble.id,
    name: escapeControls(ensemble.name),
    formula: ensemble.formula,
    atoms: ensemble.atoms,
    frames: ensemble.frames,
    accepted: ensemble.accepted,
    remarked: ensemble.remarked,
    held: ensemble.held,
    openQuestions: ensemble.openQuestions,
    chirality: ensemble.chirality,
    chiralityNote: ensemble.chiralityNote,
    example: ensemble.example,
    team: row.team,
    series: { ...row.series, name: escapeControls(row.series.name) },
    elements: [...graph.elements],
    bonds: [...graph.bonds],
    bondTable: statedTable(ensemble.bondTable, graph),
    levels: toLevels(columns),
    properties: columns.filter((column) => column.kind === "property" && !column.counter).length,
    maybeLevels: columns
      .filter(
        (column) => !column.counter && looksLikeLevel({ ...column, computed: column.definition !== null }),
      )
      .map(({ name, unit }) => (unit === null ? name : `${name} [${unit}]`)),
    torsions: columns.flatMap(({ id, name, definition }) => {
      const atoms =
        definition?.type === "observable" && definition.observable === "torsion" && definition.atoms[0];
      return atoms ? [{ id, name, atoms: atoms.map((atom) => atom - 1) }] : [];
    }),
    files,
    createdAt: ensemble.createdAt.toISOString(),
    changedAt: ensemble.changedAt.toISOString(),
    role: grant.role,
    mayCompute: roleMay(grant.role, "compute"),
  };
}
