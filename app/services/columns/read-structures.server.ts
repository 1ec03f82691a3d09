import { setImmediate as breathe } from "node:timers/promises";
import { env } from "../../env.server.ts";
import type { ColumnFields } from "../../lib/api/schemas.ts";
import type { NumberStyle } from "../../lib/csv/cells.ts";
import { DomainError } from "../../lib/errors.ts";
import { formatBytes } from "../../lib/format.ts";
import { FrameClassifier } from "../../lib/intake/classify.ts";
import { commaEnergy, commaField, fieldsWithPoints } from "../../lib/intake/comma-energy.ts";
import { EnergyScan } from "../../lib/intake/energies.ts";
import { namesEnergy } from "../../lib/intake/energy-words.ts";
import { isExtended } from "../../lib/intake/extended-comment.ts";
import { energiesAsWritten } from "../../lib/intake/field-energies.ts";
import type { MoleculeGroup } from "../../lib/intake/frame-record.ts";
import { AS_PROPOSED, withDecimalPoints } from "../../lib/intake/reading-choices.ts";
import type { IntakeMessage } from "../../lib/intake/report.ts";
import { isSdfFrame, type SdfFrame } from "../../lib/sdf/frame.ts";
import { SdfReader } from "../../lib/sdf.server.ts";
import type { XyzFrame } from "../../lib/xyz/frame.ts";
import { XyzReader } from "../../lib/xyz.server.ts";
import type { TargetEnsemble } from "./target.server.ts";

/** Coordinates that are held in memory while two files are matched. */
const MOST_BYTES = 400 * 2 ** 20;
const BREATH_MS = 15;
const PIECE_BYTES = 65_536;

/** The frames of a second file, those of the ensemble's molecule in its order of atoms. */
export interface ReadStructures {
  /** Frames seen, broken ones too. */
  frames: number;
  /** Numbers in the file, from 1, of the frames that can be matched. */
  numbers: Int32Array;
  /** Their coordinates, [frame][atom][xyz] in Å. */
  positions: Float64Array;
  labels: (string | null)[];
  lines: number[];
  scan: EnergyScan;
  extended: boolean;
  firstComment: string;
  /** Numbers with a comma, as nobody has said yet how numbers are written (row X22); null where there is nothing to ask. */
  commas: { of: "coordinates" | "energies"; frames: number; example: string } | null;
  /** Why other frames cannot be matched, and what the reader remarks. */
  messages: IntakeMessage[];
}

/** The molecule as a further batch is compared with it. */
function groupOf(target: TargetEnsemble): MoleculeGroup {
  const { graph, row } = target;
  const identity = row.identity as Pick<MoleculeGroup, "charge" | "multiplicity" | "configuration" | "seen">;
  return {
    ...identity,
    elements: [...graph.elements],
    isotopes: [...graph.isotopes],
    bonds: [...graph.bonds],
  };
}

class Gathering {
  private readonly classifier: FrameClassifier;
  readonly scan: EnergyScan;
  private readonly atoms: number;
  private readonly kept: { number: number; label: string | null; line: number; positions: Float64Array }[] =
    [];
  private bytes = 0;
  frames = 0;
  private sound = 0;
  private extendedCount = 0;
  private firstComment = "";
  readonly messages: IntakeMessage[] = [];
  private readonly commas = { coordinates: [] as string[], energies: [] as string[] };

  constructor(
    private readonly file: string,
    target: TargetEnsemble,
    energyFrom: string | null,
    /** How numbers are written, where somebody said so. */
    private readonly style: NumberStyle | null,
    /** Names of the numbers that are wanted, where they may have commas. */
    private readonly wanted: (name: string) => boolean,
  ) {
    this.classifier = new FrameClassifier({ group: groupOf(target), map: true });
    this.scan = new EnergyScan({
      from: energyFrom === "none" ? null : energyFrom,
      maxColumns: env().MAX_COLUMNS,
    });
    this.atoms = target.graph.elements.length;
  }

  take(frame: XyzFrame): void {
    this.frames += 1;
    const { number, line, label, comment, problem } = frame;
    if (problem) {
      const { reason: _, ...message } = problem;
      this.messages.push(message);
      return;
    }
    const sdf = isSdfFrame(frame) ? frame : null;
    const { positions } = this.classifier.add({
      frame: number,
      file: frame.file,
      line,
      elements: frame.elements,
      isotopes: frame.isotopes,
      positions: frame.positions,
      charge: frame.charge,
      multiplicity: frame.multiplicity,
      // Copies are as good as any frame here: each has its partner.
      energy: `${number} ${sdf ? (energiesAsWritten(sdf.fields) ?? "") : comment}`,
      table: sdf,
    });
    if (positions.length === 3 * this.atoms) {
      this.bytes += positions.byteLength;
      if (this.bytes > MOST_BYTES) throw tooMuch(this.file);
      this.kept.push({ number, label, line, positions });
    }
    const pointed = frame.decimalCommas || this.style === "comma";
    if (pointed) {
      this.scan.add(
        { number, file: frame.file, line },
        withDecimalPoints(comment),
        sdf ? fieldsWithPoints(sdf.fields) : undefined,
      );
    } else this.scan.add({ number, file: frame.file, line }, comment, sdf?.fields);
    if (this.style === null) this.noteCommas(frame, sdf);
    if (this.sound === 0) this.firstComment = comment;
    this.sound += 1;
    if (sdf ? sdf.fields.size > 0 : isExtended(comment)) this.extendedCount += 1;
  }

  private noteCommas(frame: XyzFrame, sdf: SdfFrame | null): void {
    const open = frame.open?.find(({ ask }) => ask === "decimal-comma");
    if (open) return void this.commas.coordinates.push(open.shown.hold ?? "");
    const text = sdf ? commaField(sdf.fields, this.wanted) : commaEnergy(frame.comment, this.wanted);
    if (text !== null) this.commas.energies.push(text);
  }

  /** Coordinates leave it open in any frame; energies where most have a comma: one among others is a slip (row E10). */
  private openCommas(): ReadStructures["commas"] {
    const { coordinates, energies } = this.commas;
    if (coordinates.length > 0) {
      return { of: "coordinates", frames: coordinates.length, example: coordinates[0] ?? "" };
    }
    if (energies.length * 2 <= this.sound) return null;
    return { of: "energies", frames: energies.length, example: energies[0] ?? "" };
  }

  end(): ReadStructures {
    const held = new Set<number>();
    for (const verdict of this.classifier.finish().frames) {
      if (verdict.state !== "held") continue;
      held.add(verdict.frame);
      this.messages.push(...verdict.messages.slice(0, 1));
    }
    const used = this.kept.filter(({ number }) => !held.has(number));
    const positions = new Float64Array(used.length * 3 * this.atoms);
    used.forEach((frame, k) => {
      positions.set(frame.positions, k * 3 * this.atoms);
    });
    return {
      frames: this.frames,
      numbers: Int32Array.from(used, ({ number }) => number),
      positions,
      labels: used.map(({ label }) => label),
      lines: used.map(({ line }) => line),
      scan: this.scan,
      extended: this.extendedCount * 2 > this.sound,
      firstComment: this.firstComment,
      commas: this.openCommas(),
      messages: this.messages,
    };
  }
}

function tooMuch(file: string): DomainError {
  const message = `The coordinates of ${file} take more than ${formatBytes(MOST_BYTES)}, too much to match at once. Send the energies as a table by frame number.`;
  return new DomainError("too-large", "The file is too large", message, { faults: [{ file, message }] });
}

/**
 * Reads a structure file whose frames are to be matched with those of an ensemble. Frames of another molecule, species or
 * configuration are left out, each with its reason; another order of atoms is put into the ensemble's.
 *
 * @throws IntakeRejection and DomainError as the readers do; too-large beyond what can be matched at once
 */
export async function readStructures(
  name: string,
  format: "xyz" | "sdf" | "unknown",
  bytes: AsyncIterable<Uint8Array>,
  target: TargetEnsemble,
  fields: Pick<ColumnFields, "energyFrom" | "kind" | "numbers">,
): Promise<ReadStructures> {
  const settings = env();
  const properties = fields.kind === "property";
  const from = properties ? null : (fields.energyFrom ?? null);
  const style = fields.numbers ?? null;
  // Read as proposed while nobody has said it, so that the question can be asked beside what is found.
  const decimals = style === null ? AS_PROPOSED : style === "comma" ? "comma" : undefined;
  const Reader = format === "sdf" ? SdfReader : XyzReader;
  const reader = new Reader({
    file: name,
    firstNumber: 1,
    limits: { frames: settings.MAX_FRAMES, atoms: settings.MAX_ATOMS },
    choices: decimals === undefined ? {} : { "decimal-comma": decimals },
  });
  const gathering = new Gathering(name, target, from, style, (key) =>
    properties ? true : namesEnergy(key) || from === `key:${key}` || from === `field:${key}`,
  );
  let breath = performance.now();
  for await (const chunk of bytes) {
    for (let at = 0; at < chunk.length; at += PIECE_BYTES) {
      for (const frame of reader.push(chunk.subarray(at, at + PIECE_BYTES))) gathering.take(frame);
      if (performance.now() - breath < BREATH_MS) continue;
      await breathe();
      breath = performance.now();
    }
  }
  for (const frame of reader.end()) gathering.take(frame);
  const read = gathering.end();
  read.messages.unshift(...reader.messages);
  return read;
}
