import { formatDate } from "../format.ts";

/** What a citation of an edition names. */
export interface CitationInput {
  team: string;
  ensemble: string;
  number: number;
  title: string;
  /** ISO. */
  frozenAt: string;
  contentSha256: string;
  version: string;
}

const oneLine = (text: string) => text.replace(/\s+/g, " ").trim();

/**
 * A citation as plain text.
 *
 * @example citationText(input) // Estuary, Butane, conformer ensemble, edition 2 (1 December 2026), ...
 */
export function citationText(input: CitationInput): string {
  const { team, ensemble, number, frozenAt, contentSha256: sha, version } = input;
  return (
    `${oneLine(team)}, ${oneLine(ensemble)}, conformer ensemble, edition ${number} (${formatDate(frozenAt)}), ` +
    `SHA-256 ${sha}, Lowlying ${version}.`
  );
}

/** Characters that BibTeX gives a meaning, as it writes them. */
function bibtexText(text: string): string {
  const words: Record<string, string> = {
    "\\": "\\textbackslash{}",
    "~": "\\textasciitilde{}",
    "^": "\\textasciicircum{}",
  };
  return oneLine(text).replace(/[\\{}$&#%_~^]/g, (c) => words[c] ?? `\\${c}`);
}

/** A citation as a BibTeX entry. */
export function citationBibtex(input: CitationInput): string {
  const { team, ensemble, number, frozenAt, contentSha256: sha, version } = input;
  const fields = [
    ["author", `{${bibtexText(team)}}`],
    ["title", `{${bibtexText(ensemble)}}: conformer ensemble, edition ${number}`],
    ["year", frozenAt.slice(0, 4)],
    [
      "note",
      `${bibtexText(input.title)}; frozen ${frozenAt.slice(0, 10)}; SHA-256 ${sha}; Lowlying ${version}`,
    ],
  ];
  const lines = fields.map(([name, value]) => `  ${name} = {${value}}`);
  return `@misc{lowlying-${sha.slice(0, 8)},\n${lines.join(",\n")}\n}\n`;
}

/** A scalar of YAML in double quotes, which JSON's escapes are a part of. */
const yaml = (text: string) => JSON.stringify(oneLine(text));

/** A citation as a CITATION.cff file (Citation File Format 1.2.0). */
export function citationCff(input: CitationInput): string {
  const { team, ensemble, number, frozenAt, contentSha256: sha, version } = input;
  return [
    "cff-version: 1.2.0",
    'message: "If you use these results, please cite them as below."',
    "type: dataset",
    `title: ${yaml(`${ensemble}: conformer ensemble, edition ${number}`)}`,
    "authors:",
    `  - name: ${yaml(team)}`,
    `version: ${yaml(String(number))}`,
    `date-released: ${yaml(frozenAt.slice(0, 10))}`,
    `abstract: ${yaml(`${input.title}. Computed with Lowlying ${version}.`)}`,
    "identifiers:",
    "  - type: other",
    `    value: ${yaml(`sha256:${sha}`)}`,
    '    description: "Checksum of results.json"',
    "",
  ].join("\n");
}
