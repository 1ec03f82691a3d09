import { IntakeRejection } from "../intake/reject.ts";
import type { IntakeMessage, IntakeQuestion } from "../intake/report.ts";
import { quoteFound } from "../text/escape.ts";

/** What a table's rows are matched with. */
export interface FrameFacts {
  /** One character a frame in file order, "h" where held. */
  strip: string;
  /** Frames by their label, exact. */
  labels: ReadonlyMap<string, readonly number[]>;
}

export interface KeyAnswers {
  /** What the first column holds; null where its name and content decide. */
  key: "frame" | "label" | null;
  /** Number that the file gives the first frame; null where nobody said. */
  firstFrame: 0 | 1 | null;
  /** "loose": labels that differ in case or blanks only are the same. */
  labels: "exact" | "loose" | null;
}

export interface MatchedRows {
  key: "frame" | "label";
  /** Frame of each row, from 1; 0 where it has none. */
  frames: Int32Array;
  /** Rows with a frame, accepted frames without a row. */
  matched: number;
  missing: number[];
  /** Rows whose key is no frame, the first of them. */
  unknown: { row: number; line: number; found: string }[];
  unknownCount: number;
  questions: IntakeQuestion[];
  messages: IntakeMessage[];
}

interface Keys {
  file: string;
  header: string;
  keys: readonly string[];
  rowNumbers: Int32Array;
  lines: Int32Array;
}

const FRAME_WORDS = /^(?:frames?|(?:frame[ _-]?)?(?:no|nr|num|number|index|idx)\.?)$/;
const LABEL_WORDS = /^(?:labels?|names?|titles?)$/;
const EITHER_WORDS = /^(?:conf|confs|conformers?|structures?|id|#|n)?$/;
const WHOLE = /^\+?\d{1,9}(?:\.0*)?$/;
const LISTED = 100;

/** Label without what people vary: case and blanks. */
const loosely = (text: string) => text.toLowerCase().replace(/\s+/g, "");

function reject(keys: Keys, report: Omit<IntakeMessage, "severity" | "file">): IntakeRejection {
  return new IntakeRejection({ file: keys.file, ...report });
}

/** Frame or label, by the name of the first column and, where that says neither, by what stands in it. */
function kindOfKey(keys: Keys, stated: KeyAnswers["key"]): { key: "frame" | "label"; sure: boolean } {
  if (stated !== null) return { key: stated, sure: true };
  const name = keys.header.toLowerCase().replace(/^#\s*/, "").trim();
  if (FRAME_WORDS.test(name)) return { key: "frame", sure: true };
  if (LABEL_WORDS.test(name)) return { key: "label", sure: true };
  const key = keys.keys.every((text) => WHOLE.test(text)) ? "frame" : "label";
  return { key, sure: EITHER_WORDS.test(name) };
}

function askKey(keys: Keys, proposed: "frame" | "label"): IntakeQuestion {
  const first = keys.keys.slice(0, 3).map((key) => quoteFound(key));
  return {
    id: "key",
    code: "C07",
    text: "What does the first column say?",
    reason: `Its name, "${quoteFound(keys.header)}", says neither frame nor label. It holds ${first.join(", ")}.`,
    options: [
      { id: "frame", text: "Frame numbers", values: first, proposed: proposed === "frame" },
      { id: "label", text: "Labels of frames", values: first, proposed: proposed === "label" },
    ],
  };
}

/** Numbers of frames; 0 among them means that somebody counts from 0, or that a row belongs to nothing. */
function framesByNumber(keys: Keys, facts: FrameFacts, answers: KeyAnswers) {
  const numbers = Int32Array.from(keys.keys, (key) => (WHOLE.test(key) ? Math.trunc(Number(key)) : -1));
  const zero = numbers.indexOf(0);
  const questions: IntakeQuestion[] = [];
  if (zero >= 0 && answers.firstFrame === null) {
    const last = numbers.reduce((most, number) => Math.max(most, number), 0);
    questions.push({
      id: "firstFrame",
      code: "C07",
      text: "Does the table count frames from 0?",
      reason: `Frames count from 1 here, and row ${keys.rowNumbers[zero]} is frame 0. The numbers run to ${last}, the ensemble has ${facts.strip.length} frames.`,
      options: [
        { id: "0", text: "Yes: 0 is the first frame", proposed: last < facts.strip.length },
        { id: "1", text: "No: row 0 belongs to no frame", proposed: last >= facts.strip.length },
      ],
    });
  }
  const shift = answers.firstFrame === 0 ? 1 : 0;
  const frames = numbers.map((number) => {
    const frame = number < 0 ? 0 : number + shift;
    return frame >= 1 && frame <= facts.strip.length ? frame : 0;
  });
  return { frames, questions, messages: [] as IntakeMessage[] };
}

function framesByLabel(keys: Keys, facts: FrameFacts, answers: KeyAnswers) {
  const frames = new Int32Array(keys.keys.length);
  const messages: IntakeMessage[] = [];
  const loose = new Map<string, number[]>();
  for (const [label, numbers] of facts.labels) {
    const plain = loosely(label);
    loose.set(plain, [...(loose.get(plain) ?? []), ...numbers]);
  }
  const exactFrames = new Set<number>();
  const near: { row: number; found: string; label: string }[] = [];
  const several: number[] = [];
  keys.keys.forEach((key, k) => {
    const exact = facts.labels.get(key) ?? [];
    if (exact.length === 1) {
      frames[k] = exact[0]!;
      exactFrames.add(exact[0]!);
    } else if (exact.length > 1) several.push(k);
  });
  keys.keys.forEach((key, k) => {
    if (frames[k] !== 0 || key === "" || several.includes(k)) return;
    // Exact first: a frame that has its row is not taken by a label that is only like it.
    const like = (loose.get(loosely(key)) ?? []).filter((frame) => !exactFrames.has(frame));
    if (like.length !== 1) return;
    if (answers.labels === "loose") frames[k] = like[0]!;
    else {
      const label = [...facts.labels].find(([, numbers]) => numbers.includes(like[0]!))?.[0] ?? "";
      near.push({ row: keys.rowNumbers[k]!, found: key, label });
    }
  });
  for (const k of several.slice(0, LISTED)) {
    const numbers = facts.labels.get(keys.keys[k]!) ?? [];
    messages.push({
      code: "C07",
      severity: "hold",
      file: keys.file,
      line: keys.lines[k]!,
      found: quoteFound(keys.keys[k]!),
      message: `Frames ${numbers.slice(0, 6).join(", ")} all have this label, so row ${keys.rowNumbers[k]} was not taken.`,
      hint: "Use frame numbers.",
    });
  }
  const questions = near.length > 0 && answers.labels === null ? [askLabels(near)] : [];
  return { frames, questions, messages };
}

function askLabels(near: readonly { row: number; found: string; label: string }[]): IntakeQuestion {
  const [first] = near;
  const example = `row ${first?.row} has "${quoteFound(first?.found ?? "")}", a frame "${quoteFound(first?.label ?? "")}"`;
  const count = near.length === 1 ? "One label differs" : `${near.length} labels differ`;
  return {
    id: "labels",
    code: "C09",
    text: "Are these the same labels?",
    reason: `${count} from those of frames in case or blanks only: ${example}.`,
    options: [
      { id: "loose", text: "Yes: case and blanks do not matter", proposed: true },
      { id: "exact", text: "No: leave these rows out" },
    ],
  };
}

/** @throws IntakeRejection C08 where a key stands on several rows */
function refuseDoubles(keys: Keys, frames: Int32Array): void {
  const rowsOf = new Map<string, number[]>();
  keys.keys.forEach((key, k) => {
    if (key === "") return;
    const name = frames[k] === 0 ? `key ${key}` : `frame ${frames[k]}`;
    const rows = rowsOf.get(name);
    if (rows) rows.push(k);
    else rowsOf.set(name, [k]);
  });
  const doubles = [...rowsOf.values()].filter((rows) => rows.length > 1);
  const [first] = doubles;
  if (first === undefined) return;
  const words = doubles.slice(0, 5).map((rows) => {
    const numbers = rows.slice(0, 10).map((k) => keys.rowNumbers[k]);
    return `"${quoteFound(keys.keys[rows[0]!]!)}" on rows ${numbers.join(", ")}`;
  });
  const more = doubles.length > 5 ? `, and ${doubles.length - 5} more` : "";
  throw reject(keys, {
    code: "C08",
    line: keys.lines[first[1]!]!,
    message: `The same key stands on several rows: ${words.join("; ")}${more}.`,
    hint: "Each frame has one row at most: remove the others.",
  });
}

/**
 * Finds the frame of every row (rows C07 to C09): by number from 1, or by label, exact first. What nobody said and the
 * table leaves open comes as a question; the rows are matched by what is proposed least.
 *
 * @throws IntakeRejection C08 where the same key stands twice; C07 where no row has a frame
 */
export function matchRows(keys: Keys, facts: FrameFacts, answers: KeyAnswers): MatchedRows {
  const { key, sure } = kindOfKey(keys, answers.key);
  const questions = sure ? [] : [askKey(keys, key)];
  const found = key === "frame" ? framesByNumber(keys, facts, answers) : framesByLabel(keys, facts, answers);
  const { frames } = found;
  refuseDoubles(keys, frames);
  const seen = new Uint8Array(facts.strip.length + 1);
  const unknown: MatchedRows["unknown"] = [];
  let matched = 0;
  frames.forEach((frame, k) => {
    if (frame > 0) {
      seen[frame] = 1;
      matched += 1;
    } else if (unknown.length < LISTED) {
      unknown.push({ row: keys.rowNumbers[k]!, line: keys.lines[k]!, found: quoteFound(keys.keys[k]!) });
    }
  });
  const missing: number[] = [];
  for (let frame = 1; frame < seen.length; frame++) {
    if (seen[frame] === 0 && facts.strip[frame - 1] !== "h") missing.push(frame);
  }
  questions.push(...found.questions);
  if (matched === 0 && questions.length === 0) throw noneMatched(keys, key, facts);
  const unknownCount = keys.keys.length - matched;
  return { key, frames, matched, missing, unknown, unknownCount, questions, messages: found.messages };
}

function noneMatched(keys: Keys, key: "frame" | "label", facts: FrameFacts): IntakeRejection {
  if (keys.keys.length === 0) {
    return reject(keys, {
      code: "C07",
      line: 1,
      message: "The table has no rows below its header.",
      hint: "Write one row a frame: its number or label, then its values.",
    });
  }
  const found = quoteFound(keys.keys[0] ?? "");
  const there =
    key === "frame"
      ? `The ensemble has frames 1 to ${facts.strip.length}.`
      : facts.labels.size === 0
        ? "The frames of this ensemble have no labels: use frame numbers."
        : `Its frames are labelled as "${quoteFound([...facts.labels.keys()][0] ?? "")}".`;
  return reject(keys, {
    code: "C07",
    line: keys.lines[0] ?? 1,
    found,
    message: `No row of the table has the ${key === "frame" ? "number" : "label"} of a frame.`,
    hint: `${there} The first column is "frame" or "label".`,
  });
}
