import { citationBibtex, citationCff, citationText } from "../../lib/edition/citation.ts";
import type { EditionContent } from "../../lib/edition/content.ts";
import { editionRows } from "../../lib/edition/rows.ts";
import { shownRows } from "../../lib/edition/shown.ts";
import { countingProperties, signalRows } from "../../lib/edition/signals.ts";
import type { EditionShape, EditionView, VerifiedView } from "../../lib/edition/views.ts";
import { escapeControls } from "../../lib/text/escape.ts";
import { type FoundEdition, findPositions, type LastVerification } from "./find-edition.server.ts";

/** Rows of the table of a page; the files hold all. */
const MOST_ROWS = 500;
const SHAPES = 4;
/** Decimals of coordinates in a page: a tenth of a hundredth of an Å is less than a pixel. */
const DECIMALS = 4;

/** What a page says of the last recomputation. */
export function verifiedView(last: LastVerification | null): VerifiedView | null {
  if (last === null) return null;
  const compared = last.files.filter(({ note }) => note === undefined);
  const differing = compared.filter(({ was, is }) => was !== is);
  return {
    same: last.same,
    at: last.at,
    version: last.version,
    seconds: last.seconds,
    files: compared.length,
    agree: compared.length - differing.length,
    differing,
    inputs: last.files.flatMap(({ name, note }) => (note === undefined ? [] : [{ name, note }])),
  };
}

function shapesOf(edition: FoundEdition, positions: Float64Array): EditionShape[] {
  const length = 3 * edition.content.ensemble.atoms;
  const rows = shownRows(edition.content, Math.min(SHAPES, positions.length / length));
  return rows.map((row, place) => ({
    row,
    positions: Array.from(positions.subarray(place * length, (place + 1) * length), (value) =>
      Number(value.toFixed(DECIMALS)),
    ),
  }));
}

/** Averages at the temperatures of those properties that the page shows, and populations of the rows that it has. */
function temperaturesView(content: EditionContent): EditionView["temperatures"] {
  const { temperatures } = content;
  if (temperatures === null) return null;
  const places = (signalRows(content) ?? []).map(({ place }) => place);
  return {
    ...temperatures,
    populations: temperatures.populations.map((shares) => shares.slice(0, MOST_ROWS)),
    averages: temperatures.averages.map((list) => places.map((place) => list[place] ?? null)),
  };
}

/**
 * An edition as its page shows it: no ids, no people. Access has been decided before.
 *
 * @param options.sources true where the original files may be downloaded
 */
export async function toEditionView(
  edition: FoundEdition,
  options: { sources: boolean; verified: LastVerification | null },
): Promise<EditionView> {
  const { content } = edition;
  const positions = await findPositions(edition.id);
  const frozenAt = edition.createdAt.toISOString();
  const cited = {
    team: content.team,
    ensemble: escapeControls(content.ensemble.name),
    number: edition.number,
    title: edition.title,
    frozenAt,
    contentSha256: edition.contentSha256,
    version: edition.version,
  };
  const { formula, atoms, elements, bonds, chirality, frames, held } = content.ensemble;
  const name = escapeControls(content.ensemble.name);
  return {
    number: edition.number,
    title: edition.title,
    remark: edition.remark,
    frozenAt,
    team: content.team,
    version: edition.version,
    contentSha256: edition.contentSha256,
    ensemble: { name, formula, atoms, elements, bonds, chirality, frames, held },
    level: content.level && { name: content.level.name, ordinal: content.level.ordinal },
    temperature: content.populations?.temperature ?? null,
    thermo: content.populations && {
      freeEnergy: content.populations.freeEnergy,
      energy: content.populations.energy,
      entropy: content.populations.entropy,
      effectiveCount: content.populations.effectiveCount,
    },
    summary: content.words.summary,
    methods: content.words.methods.split("\n"),
    caution: content.caution,
    findings: content.findings,
    averages: signalRows(content)?.map(({ row }) => row) ?? null,
    counting: countingProperties(content),
    uncertainty: content.uncertainty && {
      ...content.uncertainty,
      populations: content.uncertainty.populations.slice(0, MOST_ROWS),
    },
    temperatures: temperaturesView(content),
    measured: (content.measured ?? []).filter(({ nuclei }) => nuclei.length > 0),
    measuredProperties: content.measuredProperties ?? null,
    searches: content.searches ?? null,
    open: content.open,
    rows: editionRows(content).slice(0, MOST_ROWS),
    conformers: content.kept.length,
    extents: content.kept.slice(0, MOST_ROWS).map(({ extent }) => extent),
    shapes: shapesOf(edition, positions),
    viewable: shownRows(content, positions.length / (3 * atoms)),
    files: edition.files,
    sources: options.sources
      ? content.inputs.files.map(({ name: file, sha256, bytes }, position) => ({
          position,
          name: file,
          sha256,
          bytes,
        }))
      : [],
    changed: edition.changed,
    verified: verifiedView(options.verified),
    citations: { text: citationText(cited), bibtex: citationBibtex(cited), cff: citationCff(cited) },
  };
}
