import { eq } from "drizzle-orm";
import { db, inTransaction } from "~/db/client.server";
import { newId } from "~/db/new-id.server";
import { editions, ensembles } from "~/db/schema.server";
import { buildContent } from "~/lib/edition/build";
import { contentText } from "~/lib/edition/content-text";
import { editionFiles } from "~/lib/edition/edition-files";
import { type PackedFile, packFile, storeFiles } from "~/services/editions/edition-files.server";
import {
  collectFrames,
  columnIds,
  columnRows,
  contentColumn,
  contentLevel,
  describeForEdition,
  editionSource,
  editionSources,
} from "~/services/editions/edition-source.server";
import { citationFiles, type ManifestInput, manifestFile } from "~/services/editions/manifest";
import { EDITION_CODE_VERSION, productVersion } from "~/services/editions/product-version";
import { findSift, readResult } from "~/services/sifts/find-sift.server";

const NUMBER = 800;

/** An edition as the first ones were frozen: content 1, no ranges, no table of frames, no figures. */
export async function freezeFirst(at: { ensembleId: string; siftId: string }, teamId: string) {
  const [ensemble] = await db.select().from(ensembles).where(eq(ensembles.id, at.ensembleId));
  const sift = await findSift(at.siftId);
  const found = await readResult(at.siftId);
  if (ensemble === undefined || found === null) throw new Error("nothing to freeze");
  const { seconds: _seconds, ...result } = found;
  const frames = await collectFrames(ensemble, result);
  if (frames === null) throw new Error("frames are missing");
  const ids = await columnIds(ensemble.id);
  const shown = await columnRows(ensemble.id, ids);
  const level = shown.find(({ id }) => id === sift.recipe.level);
  const columns = shown.map((column) => contentColumn(column, ensemble.frames, result.kept));
  const files = await editionSources(ensemble.id);
  const version = productVersion(EDITION_CODE_VERSION);
  const recipe = {
    ...{ sift: sift.id, recipe: sift.recipe, temperature: 298.15, weights: "auto" as const, columns: ids },
    ...{ sigma: null, sigmaFrom: null, seed: 0, temperatures: [], changed: [] },
  };
  const source = await editionSource({
    ...{ ensemble, recipe, result, files, frames, columns, version },
    described: describeForEdition(ensemble),
    team: "Estuary",
    level: level ? contentLevel(level) : null,
    contentVersion: 1,
    moment: [],
    outside: [],
    searches: [],
    said: { splits: [], measured: [], measuredProperties: null },
  });
  const content = buildContent(source, null);
  const packed: PackedFile[] = [];
  for (const file of editionFiles(content, frames.positions, [])) packed.push(await packFile(file));
  const contentSha256 = packed.find(({ name }) => name === "results.json")?.sha256 ?? "";
  const createdAt = new Date("2026-11-01T08:00:00Z");
  const told: ManifestInput = {
    ...{ team: "Estuary", number: NUMBER, title: "", remark: "", contentSha256, version, content },
    ensemble: ensemble.name,
    frozenAt: createdAt.toISOString(),
  };
  for (const file of citationFiles(told)) packed.push(await packFile(file));
  packed.push(await packFile(manifestFile(told, packed)));
  const id = newId();
  // Written as those editions were: the recipe has none of the members that came later.
  const { sigma: _a, sigmaFrom: _b, seed: _c, temperatures: _d, ...first } = recipe;
  await inTransaction(async (tx) => {
    await tx.insert(editions).values({
      ...{ id, teamId, ensembleId: ensemble.id, number: NUMBER, title: "", remark: "", recipe: first },
      inputs: {
        files: files.map(({ name, sha256 }, position) => ({ position, name, sha256 })),
        frames: frames.framesSha256,
        columns: shown.map((column, k) => ({
          id: column.id,
          name: column.name,
          sha256: columns[k]?.sha256 ?? "",
        })),
      },
      codeVersion: EDITION_CODE_VERSION,
      content: contentText(content),
      contentSha: Buffer.from(contentSha256, "hex"),
      positions: Buffer.from(frames.positions.buffer),
      files: packed.map(({ name, bytes, sha256 }) => ({ name, bytes, sha256 })),
      createdBy: null,
      createdAt,
    });
    await storeFiles(tx, id, packed);
  });
  return { id, number: NUMBER };
}
