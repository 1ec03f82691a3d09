import { eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, type ensembles } from "../../db/schema.server.ts";
import { DEFAULT_ERROR_KCAL } from "../../lib/averages/averages-state.ts";
import { buildContent, type EditionSource } from "../../lib/edition/build.ts";
import type { EditionContent } from "../../lib/edition/content.ts";
import { deviationFrom } from "../../lib/edition/sections.ts";
import { findSearches } from "../averages/load-trust.server.ts";
import { outsideMethodsOf } from "../outside/outside-methods.server.ts";
import { type FoundSift, readResult } from "../sifts/find-sift.server.ts";
import {
  columnRows,
  contentColumn,
  describeForEdition,
  editionSources,
  saidForEdition,
} from "./edition-source.server.ts";
import { momentItems } from "./moment-items.server.ts";
import { EDITION_CODE_VERSION, productVersion } from "./product-version.ts";

const NOTHING = "0".repeat(64);

/** Columns by name with the checksums that the table keeps; their numbers are not read. */
async function columnHeads(ensembleId: string) {
  return db
    .select({
      id: columns.id,
      name: columns.name,
      kind: columns.kind,
      unit: columns.unit,
      rule: columns.rule,
      energyKind: columns.energyKind,
      temperature: columns.temperature,
      kindStated: columns.kindStated,
      ordinal: columns.ordinal,
      sha: columns.dataSha,
    })
    .from(columns)
    .where(eq(columns.ensembleId, ensembleId));
}

/**
 * What an edition would say if it were frozen now, without coordinates, properties and draws: enough for what changed and
 * for what is open, and the error of the level that it would take. Null while the sift is not done.
 */
export async function draftEdition(options: {
  ensemble: typeof ensembles.$inferSelect;
  team: string;
  sift: FoundSift;
  temperature: number;
  weights: "auto" | "copies" | "degeneracy";
  error: { sigmaKcal: number | null; sigmaFrom: string | null };
}): Promise<{ content: EditionContent; sigma: number | null } | null> {
  const { ensemble, team, sift, temperature, weights } = options;
  const result = sift.status === "done" ? await readResult(sift.id) : null;
  if (result === null) return null;
  const heads = await columnHeads(ensemble.id);
  const level = heads.find(({ id }) => id === sift.recipe.level);
  const levels = heads.filter(({ kind }) => kind === "energy").map(({ id }) => id);
  const energies = new Map(
    (await columnRows(ensemble.id, levels)).map((row) => [
      row.id,
      contentColumn(row, ensemble.frames, result.kept).values,
    ]),
  );
  const source: EditionSource = {
    team,
    ensemble: describeForEdition(ensemble),
    inputs: { files: await editionSources(ensemble.id), framesSha256: NOTHING },
    level: level
      ? {
          name: level.name,
          unit: level.unit ?? "",
          energyKind: level.energyKind ?? "electronic",
          temperature: level.temperature,
          kindStated: level.kindStated,
          ordinal: level.ordinal,
        }
      : null,
    recipe: sift.recipe,
    result,
    labels: [],
    energies: [],
    positions: new Float64Array(3 * ensemble.atoms * result.kept.length),
    temperature,
    weights,
    columns: heads.map(({ id, name, kind, unit, rule, sha }) => ({
      name,
      kind,
      unit,
      rule,
      values: energies.get(id) ?? [],
      sha256: sha?.toString("hex") ?? NOTHING,
    })),
    properties: [],
    version: productVersion(EDITION_CODE_VERSION),
    contentVersion: 2,
    sigma: null,
    sigmaFrom: null,
    seed: 0,
    temperatures: [],
    moment: await momentItems(sift),
    outside: await outsideMethodsOf(ensemble, sift, result),
    searches: await findSearches(ensemble.id),
    ...(await saidForEdition(ensemble.id)),
  };
  const against = heads.find(({ id }) => id === options.error.sigmaFrom);
  const taken = against ? deviationFrom(source.columns, sift.recipe.levelName, against.name) : null;
  const given = options.error.sigmaKcal ?? DEFAULT_ERROR_KCAL;
  return {
    content: buildContent(source, null),
    sigma: sift.recipe.level === null ? null : (taken ?? given),
  };
}
