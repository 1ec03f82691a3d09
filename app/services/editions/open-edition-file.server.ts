import { promisify } from "node:util";
import { deflateRaw } from "node:zlib";
import { db } from "../../db/client.server.ts";
import { conformerFiles } from "../../lib/edition/conformer-files.ts";
import type { EditionFile } from "../../lib/edition/content.ts";
import { writeZip, type ZipEntry } from "../../lib/export/zip.ts";
import { type Actor, accessEdition } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { whileAllowed } from "../while-allowed.ts";
import { readFile, readWholeFile } from "./edition-files.server.ts";
import { findEdition, findEditionFiles } from "./find-edition.server.ts";

const pack = promisify(deflateRaw);

/** A download: its name, its type, and its bytes as they are made. */
export interface EditionDownload {
  name: string;
  type: string;
  bytes: number | null;
  chunks: AsyncIterable<Uint8Array>;
}

const TYPES: Record<string, string> = {
  xyz: "chemical/x-xyz; charset=utf-8",
  sdf: "chemical/x-mdl-sdfile; charset=utf-8",
  csv: "text/csv; charset=utf-8",
  json: "application/json; charset=utf-8",
  svg: "image/svg+xml; charset=utf-8",
  txt: "text/plain; charset=utf-8",
  bib: "text/plain; charset=utf-8",
  cff: "text/plain; charset=utf-8",
};

async function* zipped(entries: AsyncIterable<{ name: string; data: Uint8Array }>) {
  const packed: ZipEntry[] = [];
  for await (const { name, data } of entries) packed.push({ name, data, deflated: await pack(data) });
  yield* writeZip(packed);
}

async function* storedEntries(editionId: string, files: readonly EditionFile[]) {
  for (const { name } of files) yield { name, data: await readWholeFile(editionId, name) };
}

async function* conformerEntries(teamId: string, editionId: string) {
  const { content } = await findEdition(teamId, editionId);
  const xyz = (await readWholeFile(editionId, "distinct-set.xyz")).toString("utf8");
  for (const { name, text } of conformerFiles(content, xyz)) yield { name, data: Buffer.from(text, "utf8") };
}

/** What a zip of that name holds; null for any other name, and where there is nothing to pack. */
function packedEntries(
  { teamId, editionId }: { teamId: string; editionId: string },
  name: string,
  files: readonly EditionFile[],
) {
  if (name === "bundle.zip") return storedEntries(editionId, files);
  if (name === "conformers.zip") return conformerEntries(teamId, editionId);
  const figures = files.filter((file) => file.name.endsWith(".svg"));
  return name === "figures.zip" && figures.length > 0 ? figureEntries(editionId, figures) : null;
}

/** The figures with a list of their checksums, as the manifest of the bundle has them. */
async function* figureEntries(editionId: string, figures: readonly EditionFile[]) {
  yield* storedEntries(editionId, figures);
  const list = figures.map(({ name, sha256 }) => `${sha256}  ${name}\n`).join("");
  yield { name: "SHA256SUMS", data: Buffer.from(list, "utf8") };
}

/**
 * A file of an edition as it was handed out first; the bundle and the files a conformer are packed from those. Access has
 * been decided before.
 *
 * @param called what the download is named after: "Butane edition 2"
 * @throws DomainError not-found for any other name
 */
export async function openEditionFile(
  at: { teamId: string; editionId: string },
  name: string,
  called: string,
): Promise<EditionDownload> {
  const files = await findEditionFiles(at.teamId, at.editionId);
  const entries = packedEntries(at, name, files);
  if (entries !== null) {
    return { name: `${called} ${name}`, type: "application/zip", bytes: null, chunks: zipped(entries) };
  }
  const file = files.find((one) => one.name === name);
  if (file === undefined) throw notFound();
  return {
    name: `${called} ${name}`,
    type: TYPES[name.split(".").pop() ?? ""] ?? "application/octet-stream",
    bytes: file.bytes,
    chunks: readFile(at.editionId, name),
  };
}

/** A file of an edition for a member of the team; it stands in the logbook. */
export async function exportEdition(options: {
  actor: Actor;
  ensembleId: string;
  number: number;
  name: string;
}): Promise<EditionDownload> {
  const grant = await accessEdition(options.actor, "read", options.ensembleId, options.number);
  const { content } = await findEdition(grant.teamId, grant.editionId);
  const called = `${content.ensemble.name} edition ${grant.number}`;
  const file = await openEditionFile(grant, options.name, called);
  await writeEntry(db, grant, grant, {
    type: "edition-exported",
    data: { number: grant.number, file: options.name },
  });
  const still = () => accessEdition(options.actor, "read", options.ensembleId, options.number);
  return { ...file, chunks: whileAllowed(file.chunks, still) };
}
