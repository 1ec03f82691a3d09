import { type CitationInput, citationBibtex, citationCff } from "../../lib/edition/citation.ts";
import type { EditionContent, EditionFile } from "../../lib/edition/content.ts";
import type { WrittenFile } from "../../lib/edition/edition-files.ts";

/** What a manifest says of the edition beside its content. */
export interface ManifestInput extends CitationInput {
  remark: string;
  content: EditionContent;
}

/** Citations and, last, the manifest that lists every other file with size and checksum. */
export function citationFiles(input: ManifestInput): WrittenFile[] {
  return [
    { name: "citation.bib", pieces: [citationBibtex(input)] },
    { name: "CITATION.cff", pieces: [citationCff(input)] },
  ];
}

/**
 * The manifest of the bundle: parameters, checksums of what went in and of every file that came out.
 *
 * @param files all files of the bundle but the manifest itself
 */
export function manifestFile(input: ManifestInput, files: readonly EditionFile[]): WrittenFile {
  const { content } = input;
  const manifest = {
    schema: "lowlying-edition-manifest",
    schemaVersion: 1,
    caution: content.caution,
    edition: {
      number: input.number,
      title: input.title,
      remark: input.remark,
      frozenAt: input.frozenAt,
      team: input.team,
      ensemble: { name: content.ensemble.name, formula: content.ensemble.formula },
      lowlying: input.version,
      contentSha256: input.contentSha256,
    },
    constants: content.constants,
    units: content.units,
    level: content.level,
    recipe: {
      sift: content.recipe,
      populations: content.populations && {
        temperature: content.populations.temperature,
        weights: content.populations.weights,
      },
      averages: content.averages?.map(({ property, rule }) => ({ property, rule })) ?? null,
      comparisons: content.comparisons.map(({ reference }) => ({
        reference,
        align: "least-squares",
        temperature: content.populations?.temperature ?? null,
      })),
    },
    inputs: {
      files: content.inputs.files,
      framesSha256: content.inputs.framesSha256,
      columns: content.columns.map(({ name, kind, unit, sha256 }) => ({ name, kind, unit, sha256 })),
    },
    files: files.map(({ name, bytes, sha256 }) => ({ name, bytes, sha256 })),
  };
  return { name: "manifest.json", pieces: [`${JSON.stringify(manifest, null, 2)}\n`] };
}
