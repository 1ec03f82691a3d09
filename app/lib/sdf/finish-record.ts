import { AS_PROPOSED, type OpenReading, type ReadingChoices } from "../intake/reading-choices.ts";
import type { IntakeMessage } from "../intake/report.ts";
import { hasSteeringCharacters, quoteFound } from "../text/escape.ts";
import type { AtomFault } from "../xyz/atom-line.ts";
import { type FrameProblem, NOTE_LENGTH } from "../xyz/frame.ts";
import type { BuilderFault } from "../xyz/frame-builder.ts";
import { looksLikeBohr } from "../xyz/geometry-checks.ts";
import { fromBohr, readLengths } from "../xyz/open-frame.ts";
import type { FieldCollector } from "./data-fields.ts";
import { EXACT_FIELD, exactCoordinates } from "./exact-coordinates.ts";
import type { SdfFrame } from "./frame.ts";
import type { RecordBuilder, RecordRemark } from "./record-builder.ts";
import type { Topologies, Topology } from "./topology.ts";

/** What the reader knows of a record beyond its lines. */
export interface RecordPlace {
  readonly file: string;
  readonly number: number;
  readonly lineCount: number;
}

/** What a record leaves open (rows S12, X27), read as the choices say. */
class OpenRecord {
  readonly readings: OpenReading[] = [];
  readonly remarks: RecordRemark[] = [];
  bohr = false;

  constructor(
    private readonly choices: ReadingChoices,
    private readonly line: number,
  ) {}

  /** The fault, where the choices do not take it away. */
  hydrogens(fault: AtomFault, atoms: number): AtomFault | null {
    const { choices, line } = this;
    const choice = choices.hydrogens;
    if (fault.code !== "S12" || (choice !== AS_PROPOSED && choice !== "heavy")) return fault;
    const missing = fault.message.split(" ")[0] ?? "";
    const shown = { heavy: `${atoms} atoms`, hold: `${missing} H missing` };
    if (choice === AS_PROPOSED) this.readings.push({ ask: "hydrogens", proposed: "hold", line, shown });
    else {
      const message = `${fault.message} The record is used with the atoms that it lists: results are those of the heavy atoms only.`;
      this.remarks.push({ code: "S12", line, message });
    }
    return null;
  }

  /** True where the record stays held for its lengths. */
  lengths(positions: Float64Array): boolean {
    const read = readLengths(true, this.choices, positions, this.line);
    this.bohr = read.bohr;
    if (read.open) this.readings.push(read.open);
    return read.held;
  }
}

const NO_KEYS = new Map<string, never>();
const NO_COLUMNS: readonly never[] = [];
const NO_REMARKS: readonly never[] = [];

/** Makes the frame of a finished record: last checks, remarks, or the one reason why it is held. */
export function finishRecord(
  builder: RecordBuilder,
  data: FieldCollector,
  topologies: Topologies,
  place: RecordPlace,
  choices: ReadingChoices = {},
): SdfFrame {
  const { head, version, chiralFlag, line } = builder;
  const dimension = dimensionOf(head.program);
  const topology = builder.fault === null && builder.count > 0 ? topologies.of(builder) : null;
  const open = new OpenRecord(choices, line);
  const fault = builder.fault ?? checkWhole(builder, topology, dimension, open);
  if (fault) return heldFrame(builder, data, place, problemOf(fault, place), dimension);
  const { charge, multiplicity, elements, isotopes, bonds, orders, charges, radicals } = topology!;
  const { positions, remark } = takeExact(builder, data);
  const remarks = collectRemarks(builder, data, topology!, dimension);
  if (remark) remarks.push(remark);
  remarks.push(...open.remarks);
  if (open.bohr) fromBohr(positions);
  // Written out: spreading objects of this size costs as much as reading the atoms.
  return {
    number: place.number,
    file: place.file,
    line,
    lineCount: place.lineCount,
    declaredAtoms: builder.count,
    comment: head.comment,
    extended: false,
    keys: NO_KEYS,
    label: head.title.trim() || null,
    charge,
    multiplicity,
    elements,
    isotopes,
    labels: builder.labels,
    positions,
    extra: NO_COLUMNS,
    note: noteOf(data),
    problem: null,
    ...(open.readings.length > 0 ? { open: open.readings } : {}),
    remarks: remarks.length === 0 ? NO_REMARKS : remarks.map((one) => toMessage(one, place)),
    program: head.program,
    version,
    dimension,
    chiralFlag,
    bonds,
    orders,
    charges,
    radicals,
    fields: data.fields,
  };
}

function heldFrame(
  builder: RecordBuilder,
  data: FieldCollector,
  place: RecordPlace,
  problem: FrameProblem,
  dimension: 2 | 3 | null,
): SdfFrame {
  const { head } = builder;
  return {
    ...place,
    ...NOTHING,
    line: builder.line,
    declaredAtoms: builder.count,
    comment: head.comment,
    label: head.title.trim() || null,
    note: noteOf(data),
    problem,
    program: head.program,
    version: builder.version,
    dimension,
    chiralFlag: builder.chiralFlag,
    fields: data.fields,
  };
}

function noteOf(data: FieldCollector): string | null {
  return data.note === "" ? null : data.note.trim().slice(0, NOTE_LENGTH) || null;
}

/** What a held record has of a molecule. */
const NOTHING = {
  extended: false,
  keys: NO_KEYS,
  extra: NO_COLUMNS,
  remarks: NO_REMARKS,
  charge: null,
  multiplicity: null,
  elements: new Uint8Array(0),
  isotopes: null,
  labels: null,
  positions: new Float64Array(0),
  bonds: new Int32Array(0),
  orders: null,
  charges: null,
  radicals: null,
};

/** Columns 21 and 22 of the second line. */
function dimensionOf(program: string): 2 | 3 | null {
  const code = program.slice(20, 22).toUpperCase();
  return code === "3D" ? 3 : code === "2D" ? 2 : null;
}

function problemOf(fault: BuilderFault, place: RecordPlace): FrameProblem {
  const { found, ...rest } = fault;
  const quoted = found === undefined ? {} : { found: quoteFound(found.trim()) };
  return { ...rest, ...quoted, severity: "hold", file: place.file, frame: place.number };
}

function toMessage(remark: RecordRemark, place: RecordPlace): IntakeMessage {
  const { found, ...rest } = remark;
  const quoted = found === undefined ? {} : { found: quoteFound(found.trim()) };
  return { ...rest, ...quoted, severity: "remark", file: place.file, frame: place.number };
}

// --- checks that need the whole record ------------------------------------------------------------

function checkWhole(
  builder: RecordBuilder,
  topology: Topology | null,
  dimension: 2 | 3 | null,
  open: OpenRecord,
): BuilderFault | null {
  const { line } = builder;
  if (topology === null) {
    const message = "The record has no atoms.";
    return { code: "X04", reason: "unreadable", line, message, hint: "Its count of atoms is 0." };
  }
  if (dimension === 2 && isFlat(builder.positions)) {
    return {
      code: "S11",
      reason: "unreadable",
      line,
      message: "The record is a drawing: its header says 2D, and all z are zero.",
      hint: "Write the conformers with their three-dimensional coordinates.",
    };
  }
  const fault = topology.fault && open.hydrogens(topology.fault, builder.count);
  if (fault) return { ...fault, line };
  if (!looksLikeBohr(builder.elements, builder.positions) || !open.lengths(builder.positions)) return null;
  return {
    code: "X27",
    reason: "unclear",
    line,
    message: "The distances look like bohr: nothing lies near enough for a bond in Å.",
    hint: "Convert the coordinates to Å (1 bohr is 0.529177 Å) and take the file in again.",
  };
}

function isFlat(positions: Float64Array): boolean {
  for (let k = 2; k < positions.length; k += 3) if (positions[k] !== 0) return false;
  return true;
}

/** Coordinates to the last digit, where the record carries them along. */
function takeExact(
  builder: RecordBuilder,
  data: FieldCollector,
): { positions: Float64Array; remark: RecordRemark | null } {
  const { fields } = data;
  const { positions } = builder;
  const [text, ...more] = fields.get(EXACT_FIELD) ?? [];
  if (text === undefined) return { positions, remark: null };
  const exact = more.length === 0 ? exactCoordinates(text, positions) : null;
  if (exact === null) {
    const message = `“${EXACT_FIELD}” does not fit the coordinates of the structure, which count.`;
    const hint = "A program may have moved the atoms and carried the field along.";
    return { positions, remark: { code: "S25", line: builder.line, message, hint } };
  }
  fields.delete(EXACT_FIELD);
  return { positions: exact, remark: null };
}

// --- remarks ----------------------------------------------------------------------------------------

function collectRemarks(
  builder: RecordBuilder,
  data: FieldCollector,
  topology: Topology,
  dimension: 2 | 3 | null,
): RecordRemark[] {
  return [
    ...builder.remarks,
    ...headRemarks(builder, dimension),
    ...atomRemarks(builder),
    ...topology.remarks.map((remark) => ({ ...remark, line: builder.looseBonds || builder.line })),
    ...dataRemarks(data, builder.line),
  ];
}

function headRemarks(builder: RecordBuilder, dimension: 2 | 3 | null): RecordRemark[] {
  const remarks: RecordRemark[] = [];
  const { head } = builder;
  const flat = isFlat(builder.positions);
  if (dimension === 2 && !flat) {
    const message = "The header says 2D, but z differs from zero: read as three-dimensional.";
    remarks.push({ code: "S11", line: head.line + 1, message });
  } else if (dimension === 3 && flat && builder.count > 3) {
    const message = "The header says 3D, but all z are zero.";
    remarks.push({ code: "S11", line: head.line + 1, message });
  }
  const steering = [head.title, ...(builder.labels ?? [])].find(
    (text) => text != null && hasSteeringCharacters(text),
  );
  if (steering != null) {
    const message = "A label holds control or text-direction characters; they are shown escaped.";
    remarks.push({ code: "G13", line: head.line, message, found: steering });
  }
  return remarks;
}

function atomRemarks(builder: RecordBuilder): RecordRemark[] {
  const remarks: RecordRemark[] = [];
  if (builder.substitutions > 0) {
    const message = "A typographic minus or blank stands in a number; it is read as - or a blank.";
    remarks.push({ code: "G14", line: builder.substitutions, message });
  }
  if (builder.dummies > 0) {
    const what = builder.dummies === 1 ? "One dummy atom is" : `${builder.dummies} dummy atoms are`;
    const message = `${what} kept, and left out of bonds, RMSD and masses.`;
    remarks.push({ code: "X19", line: builder.line, message });
  }
  return remarks;
}

function dataRemarks(data: FieldCollector, line: number): RecordRemark[] {
  const remarks: RecordRemark[] = [];
  if (data.stray) {
    const message =
      data.note === ""
        ? "Text stands behind the end of a value; it is taken as its continuation."
        : "Text stands before the first data header; it is kept as a note.";
    remarks.push({ code: "S17", line: data.stray.line, message, found: data.stray.text });
  }
  if (data.twice !== null) {
    const message = "A tag stands twice in the record; both values are kept.";
    remarks.push({ code: "S19", line, message, found: data.twice });
  }
  if (data.cut) {
    const message = "The data of the record are longer than 1 MiB; what lies beyond is not kept.";
    remarks.push({ code: "S16", line, message });
  }
  return remarks;
}
