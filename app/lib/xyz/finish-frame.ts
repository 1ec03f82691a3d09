import { atomName } from "../chem/elements.ts";
import type { ExtendedEntry, ExtendedValue } from "../intake/extended-comment.ts";
import { AS_PROPOSED } from "../intake/reading-choices.ts";
import type { IntakeMessage } from "../intake/report.ts";
import { hasSteeringCharacters, quoteFound } from "../text/escape.ts";
import { type FrameProblem, NOTE_LENGTH, type XyzFrame } from "./frame.ts";
import type { BuilderFault, FrameBuilder } from "./frame-builder.ts";
import { bondAcrossCell, looksLikeBohr } from "./geometry-checks.ts";
import { fromBohr, readLengths } from "./open-frame.ts";

/** What the reader knows of a frame beyond its lines. */
export interface FramePlace {
  readonly file: string;
  readonly number: number;
  readonly lineCount: number;
  /** Equal to those of the builder, shared with other frames. */
  readonly elements: Uint8Array;
  /** A fault of the frame's form, worse than what its lines hold. */
  readonly fault: BuilderFault | null;
  /** Lines behind the frame that belong to none (row X11), and the first of them. */
  readonly noteLines: { readonly line: number; readonly text: string } | null;
}

type Remark = Omit<IntakeMessage, "severity" | "file" | "frame">;

/** Makes the frame of a finished builder: last checks, label, charge, remarks, or the one reason why it is held. */
export function finishFrame(builder: FrameBuilder, place: FramePlace): XyzFrame {
  const cell = readCell(builder.keys);
  builder.checkDecimals();
  const fault = builder.fault ?? place.fault ?? checkWhole(builder, cell);
  const sound = fault === null;
  const label = labelOf(builder);
  const frame: XyzFrame = {
    number: place.number,
    file: place.file,
    line: builder.line,
    lineCount: place.lineCount,
    declaredAtoms: builder.count,
    comment: builder.comment ?? "",
    extended: builder.extended,
    keys: builder.keys,
    label,
    charge: wholeNumber(builder.keys, CHARGE_KEYS),
    multiplicity: wholeNumber(builder.keys, MULTIPLICITY_KEYS),
    elements: sound ? place.elements : new Uint8Array(0),
    isotopes: sound ? builder.isotopes : null,
    labels: sound ? builder.labels : null,
    positions: sound ? builder.positions : new Float64Array(0),
    extra: builder.extraColumns(),
    note: noteOf(builder, place),
    problem: fault && problemOf(fault, place),
    remarks: sound ? collectRemarks(builder, place, label, cell) : NO_REMARKS,
  };
  return sound && builder.open.size > 0 ? { ...frame, ...openOf(builder) } : frame;
}

const NO_REMARKS: readonly IntakeMessage[] = [];

/** What is still to be asked: what was answered is read as it was. */
function openOf({ open, choices }: FrameBuilder): Pick<XyzFrame, "open" | "decimalCommas"> {
  const asked = [...open.values()].filter(({ ask }) => choices[ask] === AS_PROPOSED);
  return {
    ...(asked.length === 0 ? {} : { open: asked }),
    ...(open.has("decimal-comma") ? { decimalCommas: true } : {}),
  };
}

function problemOf(fault: BuilderFault, place: FramePlace): FrameProblem {
  const { found, ...rest } = fault;
  const quoted = found === undefined ? {} : { found: quoteFound(found) };
  return { ...rest, ...quoted, severity: "hold", file: place.file, frame: place.number };
}

function noteOf(builder: FrameBuilder, place: FramePlace): string | null {
  if (builder.countLine.note === null && place.noteLines === null) return null;
  const parts = [builder.countLine.note, place.noteLines?.text].filter((part) => part != null);
  return parts.join("\n").slice(0, NOTE_LENGTH);
}

/** The key `name`, else `label`; in plain text also as `name: ...`. */
function labelOf(builder: FrameBuilder): string | null {
  const text = builder.keys.get("name")?.text.trim() || builder.keys.get("label")?.text.trim();
  if (text) return text;
  if (builder.extended || !builder.comment?.includes(":")) return null;
  const plain = /(?:^|\s)(?:name|label):\s*("[^"]*"|\S+)/.exec(builder.comment)?.[1];
  return plain?.replace(/^"|"$/g, "").trim() || null;
}

const CHARGE_KEYS = ["charge", "total_charge", "net_charge"];
const MULTIPLICITY_KEYS = ["multiplicity", "spin_multiplicity", "mult"];

function wholeNumber(keys: ReadonlyMap<string, ExtendedEntry>, names: readonly string[]): number | null {
  if (keys.size === 0) return null;
  for (const [key, entry] of keys) {
    if (!names.includes(key.toLowerCase())) continue;
    const value = typeof entry.value === "number" ? entry.value : Number.NaN;
    if (Number.isInteger(value)) return value + 0;
  }
  return null;
}

// --- cell ---------------------------------------------------------------------------------------

interface Cell {
  /** Null where the key does not hold nine (or three) numbers. */
  readonly vectors: Float64Array | null;
  readonly stated: boolean;
  readonly periodic: readonly boolean[];
}

function flatNumbers(value: ExtendedValue): number[] | null {
  if (typeof value === "number") return [value];
  if (typeof value !== "object") return null;
  const parts = value.map(flatNumbers);
  return parts.every((part) => part !== null) ? parts.flat() : null;
}

/** `Lattice` and `pbc` (row X35). Without `pbc` a lattice repeats in all three directions, as the specification says. */
function readCell(keys: ReadonlyMap<string, ExtendedEntry>): Cell | null {
  const lattice = keys.get("Lattice");
  const pbc = keys.get("pbc");
  if (!lattice && !pbc) return null;
  const flags = pbc && Array.isArray(pbc.value) && pbc.value.length === 3 ? pbc.value : null;
  const one = pbc && typeof pbc.value === "boolean" ? pbc.value : lattice !== undefined;
  const periodic = [0, 1, 2].map((k) => (flags ? flags[k] === true || flags[k] === 1 : one));
  const numbers = lattice ? flatNumbers(lattice.value) : null;
  let vectors: Float64Array | null = null;
  if (numbers?.length === 9) vectors = Float64Array.from(numbers);
  else if (numbers?.length === 3)
    vectors = Float64Array.of(numbers[0]!, 0, 0, 0, numbers[1]!, 0, 0, 0, numbers[2]!);
  return { vectors, stated: lattice !== undefined, periodic };
}

// --- checks that need the whole frame -------------------------------------------------------------

function checkWhole(builder: FrameBuilder, cell: Cell | null): BuilderFault | null {
  if (builder.count === 0) {
    return {
      code: "X04",
      reason: "unreadable",
      line: builder.line,
      message: "The frame has no atoms.",
      hint: "Its count is 0; the calculation may have failed.",
    };
  }
  return checkCell(builder, cell) ?? checkUnit(builder);
}

/** The word by itself: `e*bohr` and `hartree/bohr` are units of something else. */
const NAMES_BOHR = /(?<![\w*·/^-])bohrs?(?![\w*·/^-])/i;

function namesBohr(text: string | null): boolean {
  // Most comments have no such letter, and one letter is found faster than a word.
  return text !== null && (text.includes("h") || text.includes("H")) && NAMES_BOHR.test(text);
}

function checkUnit(builder: FrameBuilder): BuilderFault | null {
  const word = namesBohr(builder.countLine.note) || namesBohr(builder.comment);
  const looks = looksLikeBohr(builder.elements, builder.positions);
  if (!word && !looks) return null;
  const read = readLengths(looks, builder.choices, builder.positions, builder.line);
  if (read.bohr) fromBohr(builder.positions);
  if (read.open) builder.noteOpen(read.open);
  if (!read.held) return null;
  return {
    code: "X27",
    reason: "unclear",
    line: builder.line,
    message: word
      ? "The frame names bohr, and coordinates are read in Å."
      : "The distances look like bohr: nothing lies near enough for a bond in Å.",
    hint: "Convert the coordinates to Å (1 bohr is 0.529177 Å) and take the file in again.",
  };
}

function checkCell(builder: FrameBuilder, cell: Cell | null): BuilderFault | null {
  if (!cell?.vectors || !cell.periodic.some(Boolean)) return null;
  const pair = bondAcrossCell(builder.elements, builder.positions, cell.vectors, cell.periodic);
  if (!pair) return null;
  const [a, b] = pair.map((atom) => atomName(builder.elements, atom));
  return {
    code: "X35",
    reason: "unreadable",
    line: builder.line,
    message: `The atoms ${a} and ${b} are bonded only across the wall of the cell.`,
    hint: "Write the molecule in one piece; the cell itself is not used.",
  };
}

// --- remarks ------------------------------------------------------------------------------------

function collectRemarks(
  builder: FrameBuilder,
  place: FramePlace,
  label: string | null,
  cell: Cell | null,
): readonly IntakeMessage[] {
  const remarks = [
    ...countRemarks(builder),
    ...commentRemarks(builder, label, cell),
    ...atomRemarks(builder),
    ...noteRemarks(place),
  ];
  if (remarks.length === 0) return NO_REMARKS;
  const at = { severity: "remark" as const, file: place.file, frame: place.number };
  return remarks.map((remark) => ({ ...remark, ...at }));
}

function countRemarks(builder: FrameBuilder): Remark[] {
  const { note } = builder.countLine;
  if (note === null) return [];
  const message = "More than the count stands on the count line; it is kept as a note.";
  return [{ code: "X02", line: builder.line, message, found: quoteFound(note) }];
}

const ODDITY_WORDS = {
  "bare-key": "a key stands without a value and is read as true",
  "single-quotes": "a value in single quotes is read as text",
  "key-twice": "a key stands twice, and the last one counts",
} as const;

/** Everything odd about the keys of a comment, as one message. */
function oddityRemarks({ oddities }: FrameBuilder, line: number): Remark[] {
  if (oddities.size === 0) return [];
  const words = [...oddities.keys()].map((oddity) => ODDITY_WORDS[oddity]).join("; ");
  const found = quoteFound([...new Set(oddities.values())].join(", "));
  return [{ code: "X33", line, message: `${words.charAt(0).toUpperCase()}${words.slice(1)}.`, found }];
}

function commentRemarks(builder: FrameBuilder, label: string | null, cell: Cell | null): Remark[] {
  const line = builder.line + 1;
  const remarks: Remark[] = [];
  if (builder.commentLikeAtom) {
    const message = `Line ${line} looks like an atom. Is the comment line missing?`;
    remarks.push({ code: "X06", line, message, found: quoteFound(builder.comment ?? "") });
  }
  remarks.push(...oddityRemarks(builder, line));
  const steering = [label, ...(builder.labels ?? [])].find(
    (text) => text != null && hasSteeringCharacters(text),
  );
  if (steering != null) {
    const message = "A label holds control or text-direction characters; they are shown escaped.";
    remarks.push({ code: "G13", line, message, found: quoteFound(steering) });
  }
  if (cell && (cell.stated || cell.periodic.some(Boolean))) remarks.push(cellRemark(cell, line));
  return remarks;
}

function cellRemark(cell: Cell, line: number): Remark {
  const odd = cell.stated && cell.vectors === null;
  const message = odd
    ? "“Lattice” does not hold nine numbers; it is kept as text."
    : "The cell (Lattice, pbc) is not used: the molecule is read as it stands.";
  return { code: "X35", line, message };
}

function atomRemarks(builder: FrameBuilder): Remark[] {
  const remarks: Remark[] = [];
  if (builder.commaLines > 0) {
    remarks.push({ code: "X21", line: builder.commaLines, message: "Commas separate the columns." });
  }
  if (builder.carets > 0) {
    const message = "An exponent is written “*^”; it is read as e.";
    remarks.push({ code: "X23", line: builder.carets, message });
  }
  if (builder.substitutions > 0) {
    const message = "A typographic minus or blank stands in a number; it is read as - or a blank.";
    remarks.push({ code: "G14", line: builder.substitutions, message });
  }
  if (builder.dummies > 0) {
    const what = builder.dummies === 1 ? "One dummy atom is" : `${builder.dummies} dummy atoms are`;
    const message = `${what} kept, and left out of bonds, RMSD and masses.`;
    remarks.push({ code: "X19", line: builder.line, message });
  }
  const unnamed = builder.extraColumns().filter((column) => column.name === null).length;
  if (unnamed > 0) {
    const what = unnamed === 1 ? "One more column follows" : `${unnamed} more columns follow`;
    const message = `${what} x, y and z; kept as unnamed per-atom columns, never as energies.`;
    remarks.push({ code: "X25", line: builder.line, message });
  }
  return remarks;
}

function noteRemarks(place: FramePlace): Remark[] {
  if (!place.noteLines) return [];
  const found = quoteFound(place.noteLines.text.split("\n")[0] ?? "");
  const message = "Other lines follow the frame; they are kept as a note.";
  return [{ code: "X11", line: place.noteLines.line, message, found }];
}
