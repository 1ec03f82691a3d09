import type { IntakeMessage, IntakeQuestion } from "./intake/report.ts";
import type { LogbookKind } from "./logbook/kinds.ts";
import type { SiftRecipe } from "./recipe/recipe.ts";
import type { SiftResult } from "./recipe/result.ts";

/** What loaders hand to components: plain JSON, nothing a reader of the page may not see. */

export type Role = "owner" | "analyst" | "reader" | "guest";
export type EnergyKind = "electronic" | "zero-point" | "enthalpy" | "free";

export interface LevelView {
  id: string;
  name: string;
  unit: string;
  /** Accepted frames with a value; `missing` are the accepted ones without. */
  count: number;
  missing: number;
  /** From 1, in order of arrival: fixes hue and marker. */
  ordinal: number;
  energyKind: EnergyKind;
  temperature: number | null;
}

export interface FileView {
  position: number;
  name: string;
  /** Name of the zip archive that it came in; null for a file of its own. */
  archive: string | null;
  /** Which upload or search brought it, from 1. */
  batch: number;
  /** What that search is called by its people; absent where nobody said, or where it does not matter. */
  batchName?: string;
  format: string;
  sha256: string;
  bytes: number;
  firstFrame: number;
  frames: number;
}

export interface EnsembleView {
  id: string;
  name: string;
  formula: string;
  atoms: number;
  frames: number;
  accepted: number;
  remarked: number;
  held: number;
  openQuestions: number;
  chirality: "achiral" | "chiral" | "unsure";
  chiralityNote: string;
  example: boolean;
  team: { id: string; name: string };
  series: { id: string; name: string };
  /** Atomic numbers, and bonds as flat pairs from 0. */
  elements: number[];
  bonds: number[];
  /** Orders of the bonds and charges of the atoms as the file (or a SMILES) states them; null where it does not. */
  bondTable: { orders: number[]; charges: number[] } | null;
  levels: LevelView[];
  /** Property columns: what can be averaged. */
  properties: number;
  /** Names, with their units, of properties that are probably energies and would serve as levels. */
  maybeLevels: string[];
  /** Torsions that were made columns, atoms from 0: they label the shape of a conformer. */
  torsions: { id: string; name: string; atoms: number[] }[];
  files: FileView[];
  createdAt: string;
  changedAt: string;
  /** Of the person who looks. */
  role: Role;
  /** True where that person may take in, compute, hold and release. */
  mayCompute: boolean;
}

export type SiftStatus = "queued" | "running" | "done" | "failed" | "cancelled";

export interface SiftView {
  id: string;
  status: SiftStatus;
  progress: number;
  /** Pairs compared so far, while it runs. */
  pairs?: number;
  /** On a page alone: the server did not answer the last question about it. */
  silent?: true;
  recipe: SiftRecipe;
  result: SiftResult | null;
  error: string | null;
  createdAt: string;
  /** False where frames were held, released or changed since. */
  current: boolean;
}

export interface FrameView {
  number: number;
  file: number;
  line: number;
  label: string | null;
  state: "accepted" | "remarked" | "held";
  holdReason: string | null;
  note: string | null;
  /** A person may release it; false for another species and for what cannot be read. */
  releasable: boolean;
  /** Its coordinates can be shown with the ensemble's atoms. */
  showable: boolean;
}

export interface IntakeView {
  /** One character a frame in file order: a accepted, r remarked, h held, w held for nothing but an open question. */
  strip: string;
  /** Frames that are held or remarked, up to 500 of each. */
  held: FrameView[];
  remarked: FrameView[];
  /** Frames held for nothing but an open question, all of them. */
  waiting: number;
  messages: IntakeMessage[];
  questions: IntakeQuestion[];
  /** The number that was named as the energy, with the files or since; null where the only one was taken. */
  energyFrom: string | null;
  /** Numbers of the first frames that can be named as the energy, the likeliest first. */
  numbers: NumberView[];
  /** How the energies of the files are read as things stand, whoever said so and when. */
  inForce: EnergiesInForce[];
  /** Ensembles that were made of held frames, as far as they still exist and the reader may see them. */
  became: { ensembleId: string; name: string; frames: number[] }[];
}

/** A number of comment lines or data fields, as a request names it and as a person does. */
export interface NumberView {
  /** "key:NAME", "number:N" or "field:NAME". */
  from: string;
  name: string;
  /** As written in the first frame that has it. */
  example: string | null;
}

/** Energies that the files hold themselves: which number they are, and what was stated or read of it. */
export interface EnergiesInForce {
  level: string;
  /** "key:NAME", "number:N" or "field:NAME". */
  from: string;
  unit: string;
  kind: EnergyKind;
  /** False where nobody said what kind they are. */
  kindStated: boolean;
  temperature: number | null;
}

/** Row of the table of ensembles. */
export interface EnsembleRow {
  id: string;
  name: string;
  formula: string;
  series: { id: string; name: string };
  frames: number;
  held: number;
  /** Of these the ones that wait for nothing but an answer. */
  waiting: number;
  openQuestions: number;
  levels: { name: string; ordinal: number }[];
  fileNames: string[];
  /** Of the newest current sift. */
  sift: {
    id: string;
    status: SiftStatus;
    progress: number;
    distinct: number | null;
    /** Populations at 298.15 K in falling order, up to 60, then the rest in one. */
    shares: number[];
    lowest: number | null;
    effectiveCount: number | null;
    /** Its settings that are not the default ones, in words. */
    changed: string[];
  } | null;
  changedAt: string;
}

export interface LogbookRow {
  id: number;
  at: string;
  who: string;
  /** Person, token, the holder of a link, or the product itself. */
  by: "person" | "token" | "link" | "product";
  /** From where it was done. */
  from: "browser" | "API" | "guest" | "server";
  type: string;
  kind: LogbookKind;
  /** Name of the ensemble it is about. */
  ensemble: string | null;
  /** One sentence. */
  text: string;
  detail: string | null;
}
