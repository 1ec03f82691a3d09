import type { ReactNode } from "react";
import type { ReferenceSection } from "~/components/layout/reference-page";
import { Badge, type BadgeTone } from "~/components/ui/badge";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { formatBytes, formatCount, trimmed } from "~/lib/format";

/** Limits of this server, as its settings have them. */
export interface FormatLimits {
  fileBytes: number;
  frames: number;
  atoms: number;
  columns: number;
  teamBytes: number;
  origin: string;
}

/** What the readers accept today, section by section. */
export function formatSections(limits: FormatLimits): ReferenceSection[] {
  return [
    { id: "files", title: "Files and limits", body: <Files limits={limits} /> },
    { id: "xyz", title: "XYZ and extended XYZ", body: <Xyz /> },
    { id: "sdf", title: "SDF and MOL", body: <Sdf /> },
    { id: "energies", title: "Energies", body: <Energies /> },
    { id: "tables", title: "Tables and second files", body: <Tables /> },
    { id: "held", title: "What is held, and why", body: <Held /> },
    { id: "rejected", title: "What is rejected", body: <Rejected limits={limits} /> },
    { id: "programs", title: "From a program", body: <Programs limits={limits} /> },
  ];
}

function Files({ limits }: { limits: FormatLimits }) {
  return (
    <>
      <p>
        XYZ, extended XYZ, SDF and MOL, plain, gzip or in a zip archive. The content decides, the name only
        hints. Text may be UTF-8 or UTF-16 with a mark, with any line ends. In an archive each entry is one
        file, folders are ignored; an entry that is itself an archive, encrypted or a link is rejected.
      </p>
      <ul>
        <li>{formatBytes(limits.fileBytes)} unpacked a file</li>
        <li>
          {formatCount(limits.frames)} frames a file, {formatCount(limits.atoms)} atoms a frame,{" "}
          {formatCount(limits.columns)} columns out of comments and data fields
        </li>
        <li>{trimmed(limits.teamBytes / 1e9, 1)} GB of original bytes a team</li>
      </ul>
      <p>
        The original bytes are kept under their SHA-256 and given back unchanged. The same bytes with the same
        answers make no second ensemble. Several files may become one ensemble: frames are numbered on from
        file to file.
      </p>
      <p>
        Every frame ends <Badge>accepted</Badge>, <Badge tone="remark">with a remark</Badge> or{" "}
        <Badge tone="held">held</Badge>. Nothing is dropped, repaired or guessed without saying so; each
        message names file, line and frame.
      </p>
    </>
  );
}

interface RuleRow {
  input: ReactNode;
  tone: BadgeTone;
  does: string;
  note?: ReactNode;
}

function Rules({ label, rows }: { label: string; rows: readonly RuleRow[] }) {
  return (
    <Table aria-label={label} className="text-sm">
      <thead>
        <tr>
          <Th>What stands in the file</Th>
          <Th>What happens</Th>
        </tr>
      </thead>
      <tbody>
        {rows.map((row, i) => (
          <Tr key={i}>
            <Td wrap>
              {row.input}
              {row.note ? <span className="block text-xs text-ink-3">{row.note}</span> : null}
            </Td>
            <Td className="align-top">
              <span className="flex py-2">
                <Badge tone={row.tone}>{row.does}</Badge>
              </span>
            </Td>
          </Tr>
        ))}
      </tbody>
    </Table>
  );
}

const ACCEPTED = { tone: "plain", does: "accepted" } as const;
const REMARK = { tone: "remark", does: "remark" } as const;
const HELD = { tone: "held", does: "held" } as const;
const ASKED = { tone: "ask", does: "asked" } as const;
const REJECTED = { tone: "danger", does: "rejected" } as const;

function Tables() {
  return (
    <>
      <p>
        Further energies and properties of the frames of an ensemble: a table whose first column is{" "}
        <code>frame</code> (numbers from 1) or <code>label</code>, and every further one a quantity with its
        unit as <code>name [unit]</code>; or a structure file with the same frames, in the same or another
        order. An energy becomes a level of its header&rsquo;s name; frames of a structure file are matched by
        equal coordinates, then by their nearest shape, and what has no partner is listed.
      </p>
      <Rules
        label="Tables"
        rows={[
          { input: "Comma, semicolon, tab or bar; quotes, line breaks in cells", ...ACCEPTED },
          { input: "Empty, NA, N/A, nan, null, - or .", note: "missing, never 0", ...ACCEPTED },
          {
            input: "Decimal commas, marks between thousands",
            note: "0,435 is never read as 0 or 435",
            ...ASKED,
          },
          { input: "Frames counted from 0, labels that differ in case or blanks", ...ASKED },
          { input: "No names in the first row", ...ASKED },
          { input: "Energies without a unit", ...ASKED },
          { input: "Text in a column of numbers, rows of no frame, frames without a row", ...REMARK },
          { input: "A number beyond 1e50, either sign", note: "out of range: missing", ...REMARK },
          { input: "Rows that are too short or too long", note: "the row is not taken", ...HELD },
          {
            input: "The same key on two rows, decimal commas between commas, a quote never closed",
            ...REJECTED,
          },
          {
            input: "Headers of atoms, such as C1, H12 or shift_7",
            note: "bound to the atom of that number; another element, or a number out of range, is rejected",
            ...ACCEPTED,
          },
        ]}
      />
    </>
  );
}

function Xyz() {
  return (
    <>
      <p>
        A frame is a line with the atom count, a comment line, and one line <code>El x y z</code> an atom, in
        Å.
      </p>
      <Rules
        label="XYZ"
        rows={[
          { input: "Symbols in any case, labels such as C1 or H_12, atomic numbers, D and T", ...ACCEPTED },
          {
            input: "Extended comment line with Properties in any order of columns, quoted values, lists",
            ...ACCEPTED,
          },
          { input: "Exponents with e, E, d or D", ...ACCEPTED },
          {
            input: "Blank lines between frames, text after the count, further lines after a frame",
            note: "kept as a note, never read as an energy",
            ...REMARK,
          },
          { input: "Dummy atoms: X, Bq, *", note: "kept, left out of bonds, RMSD and masses", ...REMARK },
          { input: "Further columns without Properties", ...REMARK },
          {
            input: "A lattice",
            note: "ignored; bonds that close only across the cell hold the frame",
            ...REMARK,
          },
          { input: "U+2212 as minus, no-break spaces in numbers", ...REMARK },
          { input: "An unknown symbol, a count of 0, atoms closer than 0.5 Å", ...HELD },
          { input: "Fewer than four columns, columns run together, nan, stars", ...HELD },
          {
            input: "Decimal commas, a leading index column, symbols with two readings (CA, CD, HG)",
            ...HELD,
          },
          { input: "Coordinates that look like bohr", ...HELD },
          {
            input: "More or fewer atom lines than the count says",
            note: "the frame and the lines up to the next whole one",
            ...HELD,
          },
        ]}
      />
      <p>
        A number is a number only when the whole word is one: <code>1,234</code> is not read as 1,{" "}
        <code>5x</code> not as 5.
      </p>
    </>
  );
}

function Sdf() {
  return (
    <>
      <p>
        Records of V2000, read by its columns, and of V3000, in one file or alone as MOL. Bonds, charges,
        radicals and isotopes come from the record; configurations from the positions.
      </p>
      <Rules
        label="SDF and MOL"
        rows={[
          { input: "Fields that touch, blank titles, index gaps and continued lines of V3000", ...ACCEPTED },
          { input: "Data fields, also over several lines; a field may be the energy", ...ACCEPTED },
          { input: "The same field twice, or in some records only", note: "missing, never 0", ...REMARK },
          { input: "No version on the counts line", note: "read as V2000", ...REMARK },
          { input: "Hydrogens without positions", note: "never added", ...ASKED },
          {
            input: "Records of several molecules, or of another configuration",
            note: "one group is the ensemble",
            ...ASKED,
          },
          { input: "The same molecule with another order of atoms", note: "the mapping is shown", ...ASKED },
          { input: "Flat records (2D), query features", ...HELD },
          { input: "More than 999 atoms or bonds in V2000, a block without its end", ...HELD },
        ]}
      />
    </>
  );
}

function Energies() {
  return (
    <>
      <p>
        Which number is the energy, and in which unit, is proposed and confirmed once for the whole upload;
        nothing is computed before. Beside each choice stands the spread it would mean.
      </p>
      <Rules
        label="Energies"
        rows={[
          { input: "A labelled number (energy = −1.2), a lone number, keys energy or free_energy", ...ASKED },
          {
            input: "A unit beside the number: hartree, Eh, a.u., eV, meV, kcal/mol, kJ/mol, cm-1, K",
            note: "counts as answered",
            ...ACCEPTED,
          },
          {
            input: "No unit",
            note: "proposed where the total fits the sum of the free atoms within 1 %",
            ...ASKED,
          },
          {
            input: "Dates, times, versions, conformer numbers, labels",
            note: "never taken for energies",
            ...ACCEPTED,
          },
          {
            input: "No energy in some frames",
            note: "they get no population; never 0, never the mean",
            ...REMARK,
          },
          {
            input: "Text, a decimal comma or a number out of range where the energy should be",
            note: "that frame has no energy; never a part of it",
            ...REMARK,
          },
          {
            input: "Two units beside one number",
            note: "frames with another than the one stated stay without energy",
            ...ASKED,
          },
          {
            input: "Free energies without their temperature, or populations at another one",
            ...REMARK,
          },
          { input: "Too few digits, one frame far off, all frames equal", ...REMARK },
        ]}
      />
    </>
  );
}

function Held() {
  return (
    <>
      <p>
        A held frame is kept, listed with its reason, and left out of every computation until somebody
        releases it. The logbook says who did, and why.
      </p>
      <Rules
        label="Held frames"
        rows={[
          {
            input: "Another composition, charge, or order of the atoms",
            note: "the largest group is the ensemble",
            ...HELD,
          },
          {
            input: "Another species: a bond formed or broke",
            note: "named by its atoms; cannot be released into this ensemble",
            ...HELD,
          },
          {
            input: "Another configuration: a stereocentre or double bond inverted",
            note: "cannot be released into this ensemble",
            ...HELD,
          },
          { input: "An open question about its energy", note: "released by the answer", ...HELD },
          { input: "A broken or incomplete frame", note: "its lines stay in the original file", ...HELD },
          { input: "By hand, with a reason", ...HELD },
        ]}
      />
    </>
  );
}

function Rejected({ limits }: { limits: FormatLimits }) {
  return (
    <>
      <p>Of a rejected file nothing is stored.</p>
      <Rules
        label="Rejected files"
        rows={[
          {
            input: "An empty file, a reaction file, or one that is neither XYZ nor SDF nor MOL",
            ...REJECTED,
          },
          {
            input: "Binary files, pictures, spreadsheets, PDF",
            note: "the message says what it looks like",
            ...REJECTED,
          },
          {
            input: "Other packings: tar, bz2, xz, zst",
            note: "send XYZ or SDF plain, as gzip or in a zip archive",
            ...REJECTED,
          },
          { input: "A gzip file that ends early or fails its checksum", ...REJECTED },
          {
            input: `More than ${formatBytes(limits.fileBytes)} unpacked, ${formatCount(limits.frames)} frames, ${formatCount(limits.atoms)} atoms, or a line over 1 MB`,
            note: "reading stops there; the limit is named",
            ...REJECTED,
          },
        ]}
      />
    </>
  );
}

function Programs({ limits }: { limits: FormatLimits }) {
  return (
    <>
      <p>
        The same readers serve the API. A member makes a token on the team’s page of tokens; what is asked in
        the browser comes with the call:
      </p>
      {/* biome-ignore lint/a11y/noNoninteractiveTabindex: it scrolls sideways, and keys must reach it */}
      <pre tabIndex={0} className="overflow-x-auto rounded-sm bg-sunk px-4 py-3 text-xs">
        <code>
          {[
            "curl --fail-with-body -H @lowlying-token.txt \\",
            "  -F level=MMFF94 -F energyUnit=kcal/mol -F energyFrom=key:energy \\",
            "  -F file=@ensemble.xyz.gz \\",
            `  ${limits.origin}/api/v1/ensembles`,
          ].join("\n")}
        </code>
      </pre>
      <p>
        Without <code>energyFrom</code> a lone candidate is taken and several become a question; without a
        clear unit the call is refused with 422 and stores nothing. Sending the same file again is safe.
      </p>
    </>
  );
}
