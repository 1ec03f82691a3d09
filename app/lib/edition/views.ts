import type { ConformerRow } from "../workbench/conformers.ts";
import type { EditionComparison } from "./compare.ts";
import type { EditionContent, EditionFile, EditionFinding, OpenItem } from "./content.ts";

/** What loaders hand to the pages of editions: plain JSON, nothing that a reader of the page may not see. */

/** A row of the table of editions. */
export interface EditionRow {
  number: number;
  title: string;
  remark: string;
  frozenAt: string;
  /** Name of the person; null where the product froze it, or the person is gone. */
  by: string | null;
  changed: string[];
  liveLinks: number;
  contentSha256: string;
  version: string;
  files: EditionFile[];
  verified: VerifiedView | null;
  /** Null where none waits, runs or failed. */
  verifying: VerifyingView | null;
}

/** How the last recomputation of an edition came out. */
export interface VerifiedView {
  same: boolean;
  at: string;
  version: string;
  seconds: number;
  files: number;
  agree: number;
  differing: { name: string; was: string; is: string | null }[];
  /** What went in and is not what it was, each with what was taken instead. */
  inputs: { name: string; note: string }[];
}

/** A recomputation that waits, runs, or could not be done. */
export interface VerifyingView {
  state: "queued" | "running" | "failed";
  progress: number;
  error: string | null;
}

/** A row of the table of links. No secret: it is kept nowhere. */
export interface LinkRow {
  id: string;
  edition: number;
  label: string;
  sources: boolean;
  logbook: boolean;
  createdAt: string;
  endsAt: string;
  state: "live" | "ended" | "ended by hand";
  opened: number;
  openedAt: string | null;
}

/** Everything of the Hand-over section that is stored. */
export interface HandOverView {
  editions: EditionRow[];
  links: LinkRow[];
  /** What the next edition would bring, in words; null where nothing can be frozen yet. */
  next: {
    number: number;
    changed: string[];
    /** Open now, but for what draws leave open: the page draws them itself. */
    open: OpenItem[];
    /** Error of the level that it would take, kcal/mol; null without energies. */
    sigma: number | null;
  } | null;
  /** Methods text of the distinct set shown, then a line an assumption; null where there is no set. */
  methods: string[] | null;
  comparison: { before: number; after: number; result: EditionComparison } | null;
  /** Why the two editions that the address names are not compared; null where they are, or where it names none. */
  comparisonFault: string | null;
  /** Longest life of a link, days. */
  linkDays: number;
  mayShare: boolean;
  now: string;
}

/** One of the pictures of an edition: a conformer with its coordinates. */
export interface EditionShape {
  row: number;
  positions: number[];
}

/** An edition as its page shows it, to guests and to members alike. */
export interface EditionView {
  number: number;
  title: string;
  remark: string;
  frozenAt: string;
  team: string;
  version: string;
  contentSha256: string;
  ensemble: {
    name: string;
    formula: string;
    atoms: number;
    elements: number[];
    bonds: number[];
    chirality: EditionContent["ensemble"]["chirality"];
    frames: number;
    held: number;
  };
  level: { name: string; ordinal: number } | null;
  temperature: number | null;
  thermo: { freeEnergy: number; energy: number; entropy: number; effectiveCount: number } | null;
  summary: string[];
  methods: string[];
  caution: string;
  findings: EditionFinding[];
  averages: EditionContent["averages"];
  /** Properties among them whose values only count the frames up. */
  counting: string[];
  uncertainty: EditionContent["uncertainty"];
  /** In the order of `averages` and `rows`. */
  temperatures: EditionContent["temperatures"];
  /** Averages beside measured values; empty where nothing was measured. */
  measured: NonNullable<EditionContent["measured"]>;
  /** The same of properties of the whole molecule; null where none was measured. */
  measuredProperties: NonNullable<EditionContent["measuredProperties"]> | null;
  /** What each search found; null where all frames are of one. */
  searches: NonNullable<EditionContent["searches"]> | null;
  /** What was open when it was frozen. */
  open: OpenItem[];
  rows: ConformerRow[];
  /** Conformers in all; `rows` holds the lowest of them. */
  conformers: number;
  /** Å, in the order of `rows`. */
  extents: number[];
  /** The most populated ones, with coordinates. */
  shapes: EditionShape[];
  /** Rows whose coordinates can be fetched for the 3D view, in the order in which they lie there. */
  viewable: number[];
  files: EditionFile[];
  sources: { position: number; name: string; sha256: string; bytes: number }[];
  changed: string[];
  verified: VerifiedView | null;
  citations: { text: string; bibtex: string; cff: string };
}
