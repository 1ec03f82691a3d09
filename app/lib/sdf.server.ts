import { DEFAULT_LIMITS, type FrameLimits } from "./intake/limits.ts";
import type { ReadingChoices } from "./intake/reading-choices.ts";
import { IntakeRejection } from "./intake/reject.ts";
import type { IntakeMessage } from "./intake/report.ts";
import { FieldCollector } from "./sdf/data-fields.ts";
import { EXACT_FIELD } from "./sdf/exact-coordinates.ts";
import { readFastAtoms, readFastBonds } from "./sdf/fast-lines.ts";
import { misplaced } from "./sdf/faults.ts";
import { finishRecord } from "./sdf/finish-record.ts";
import type { SdfFrame } from "./sdf/frame.ts";
import { HeadLines, type HeadReading } from "./sdf/head-lines.ts";
import { BLOCK_END, PropertyLines } from "./sdf/property-lines.ts";
import { RecordBuilder, type RecordRoom } from "./sdf/record-builder.ts";
import { Topologies } from "./sdf/topology.ts";
import { takeAtomLine, takeBondLine } from "./sdf/v2000.ts";
import { V3000Lines } from "./sdf/v3000.ts";
import { decodeText, Utf8Stream } from "./text/decode.ts";
import { quoteFound } from "./text/escape.ts";
import { LineBuffer, PIECE_BYTES } from "./text/lines.ts";
import type { AtomFault } from "./xyz/atom-line.ts";
import type { TextLine } from "./xyz/frame-builder.ts";
import { MAX_COLUMNS } from "./xyz/layout.ts";
import { type Place, refuseAtoms, refuseFrames } from "./xyz/refusals.ts";
import type { XyzOptions, XyzSummary } from "./xyz.server.ts";

/** Stored with every ensemble: the same bytes and answers read by the same version give the same frames. */
export const SDF_READER_VERSION = "sdf 1";

/** Tags are counted up to so many different ones in a file (row S19). */
const COUNTED_TAGS = 1000;
const OTHER_FORMATS = /^\$(?:RXN|MDL|RDFILE|RIREG|MFMT)/;

type Mode = "head" | "atoms" | "bonds" | "properties" | "v3000" | "data" | "skip";

/**
 * Reader of MOL and SDF records, V2000 and V3000, that is fed with bytes and gives frames in file order. It holds one
 * unfinished line and one record, whatever the file; time is linear in the bytes.
 *
 * A record that cannot be read is one held frame up to the next line `$$$$`.
 *
 * @throws IntakeRejection where the file is refused: a reaction or another format of the family (S24), no records
 *   (G06), NUL bytes (G04), a limit (G11)
 * @example
 * const reader = new SdfReader({ file: "run3.sdf" });
 * for (const chunk of chunks) use(reader.push(chunk));
 * use(reader.end());
 */
export class SdfReader {
  readonly messages: IntakeMessage[] = [];
  /** Frames given out so far, and how many of them are held. */
  frames = 0;
  held = 0;

  readonly #file: string;
  readonly #first: number;
  readonly #limits: FrameLimits;
  readonly #choices: ReadingChoices;
  readonly #text = new Utf8Stream();
  readonly #lines: LineBuffer;
  readonly #topologies = new Topologies();
  readonly #tags = new Map<string, number>();
  #out: SdfFrame[] = [];
  #mode: Mode = "head";
  readonly #head = new HeadLines();
  #builder: RecordBuilder | null = null;
  #properties: PropertyLines | null = null;
  #v3000: V3000Lines | null = null;
  #data = new FieldCollector();
  #legacy = false;
  readonly #room: RecordRoom = { elements: new Uint8Array(0), bonds: new Int32Array(0) };

  constructor(options: XyzOptions) {
    this.#file = options.file;
    this.#first = options.firstNumber ?? 1;
    this.#limits = { ...DEFAULT_LIMITS, ...options.limits };
    this.#choices = options.choices ?? {};
    this.#lines = new LineBuffer(options.file);
  }

  /** Takes the next bytes; returns the frames that they completed. Chunks may end anywhere. */
  push(chunk: Uint8Array): SdfFrame[] {
    const bytes = this.#text.push(chunk);
    for (let at = 0; at < bytes.length; at += PIECE_BYTES) {
      this.#lines.append(bytes.subarray(at, at + PIECE_BYTES));
      this.#drain();
    }
    return this.#give();
  }

  /** The file ends: returns the last frames. */
  end(): SdfFrame[] {
    const tail = this.#text.end();
    if (tail.length > 0) this.#lines.append(tail);
    this.#lines.close();
    this.#drain();
    this.#finish();
    return this.#give();
  }

  summary(): XyzSummary {
    return { frames: this.frames, held: this.held, lines: this.#lines.line, messages: this.messages };
  }

  #give(): SdfFrame[] {
    const out = this.#out;
    this.#out = [];
    return out;
  }

  #drain(): void {
    const lines = this.#lines;
    for (;;) {
      const builder = this.#builder;
      // A line known to be unfinished goes the slow way, or a trickle of bytes would read it again and again.
      if (builder && !lines.unfinished) {
        if (this.#mode === "atoms") readFastAtoms(lines, builder);
        this.#advance(builder);
        if (this.#mode === "bonds") readFastBonds(lines, builder);
        this.#advance(builder);
        if (this.#mode === "v3000") this.#v3000?.takeFast(lines);
      }
      if (!lines.next()) return;
      if (isDelimiter(lines)) this.#takeDelimiter();
      else if (this.#mode !== "skip") this.#take(this.#decode());
    }
  }

  /** From a full block of atoms to the bonds, from a full block of bonds to what follows. */
  #advance(builder: RecordBuilder): void {
    if (this.#mode === "atoms" && builder.read >= builder.count) this.#mode = "bonds";
    if (this.#mode === "bonds" && builder.bondsRead >= builder.bondCount) this.#mode = "properties";
  }

  #decode(): TextLine {
    const { text, legacy } = decodeText(this.#lines.bytes, this.#lines.from, this.#lines.to);
    const number = this.#lines.line;
    if (legacy && !this.#legacy) {
      this.#legacy = true;
      const message =
        "Some text is not UTF-8; it was read as Windows-1252. Labels may look odd, coordinates are not touched.";
      this.#remark("G03", message, number);
    }
    return { text, number };
  }

  #remark(code: string, message: string, line?: number): void {
    this.messages.push({
      code,
      severity: "remark",
      file: this.#file,
      ...(line === undefined ? {} : { line }),
      message,
    });
  }

  #take(line: TextLine): void {
    const builder = this.#builder;
    if (builder === null) {
      this.#takeHead(line);
      return;
    }
    switch (this.#mode) {
      case "atoms":
        this.#refuseWith(builder, takeAtomLine(builder, line), line, true);
        break;
      case "bonds":
        this.#refuseWith(builder, takeBondLine(builder, line), line, false);
        break;
      case "properties":
        if (this.#properties?.take(line)) this.#mode = "data";
        break;
      case "v3000":
        if (this.#v3000?.take(line)) this.#mode = "data";
        break;
      case "data":
        this.#takeData(builder, line);
        break;
      case "head":
      case "skip":
        break;
    }
    if (builder.fault) this.#mode = "skip";
  }

  #refuseWith(builder: RecordBuilder, fault: AtomFault | null, line: TextLine, inAtoms: boolean): void {
    if (!fault) return;
    if (BLOCK_END.test(line.text)) {
      const { read, count, bondsRead, bondCount } = builder;
      const message = `The structure ends with ${read} of its ${count} atoms and ${bondsRead} of its ${bondCount} bonds.`;
      builder.refuse({ ...misplaced("S14", message), line: line.number });
    }
    builder.refuse({ ...fault, line: line.number, ...(inAtoms ? { atom: builder.read + 1 } : {}) });
  }

  // --- head ---------------------------------------------------------------------------------------

  #takeHead(line: TextLine): void {
    if (this.frames === 0 && this.#head.isEmpty) this.#checkFirst(line);
    const reading = this.#head.take(line);
    if (reading) this.#begin(reading, line.text);
  }

  #checkFirst(line: TextLine): void {
    if (!OTHER_FORMATS.test(line.text)) return;
    throw new IntakeRejection({
      code: "S24",
      file: this.#file,
      line: line.number,
      found: quoteFound(line.text),
      message: "This is a reaction or another file of the MDL family, which is not read.",
      hint: "Write the molecules as SDF: one structure after the other, each ended by the line $$$$.",
    });
  }

  #begin({ head, counts, line, fault, remarks }: HeadReading, written: string): RecordBuilder {
    this.#checkFrames(line);
    if (counts?.version === "V2000") this.#checkAtoms(counts.atoms, written.slice(0, 3).trim());
    const builder = new RecordBuilder(head, counts, line, this.#room);
    builder.remarks.push(...remarks);
    if (fault) builder.refuse(fault);
    this.#builder = builder;
    this.#mode = counts === null ? "skip" : counts.version === "V2000" ? "atoms" : "v3000";
    if (this.#mode === "atoms") this.#properties = new PropertyLines(builder);
    if (this.#mode === "v3000") {
      this.#v3000 = new V3000Lines(builder, (atoms, text) => this.#checkAtoms(atoms, text));
    }
    return builder;
  }

  #placeAt(line: number): Place {
    return { file: this.#file, line, frame: this.#first + this.frames };
  }

  #checkFrames(line: number): void {
    const place = this.#placeAt(line);
    if (place.frame > this.#limits.frames) refuseFrames(place, this.#limits.frames);
  }

  #checkAtoms(atoms: number, written: string): void {
    if (atoms > this.#limits.atoms) refuseAtoms(this.#placeAt(this.#lines.line), this.#limits.atoms, written);
  }

  // --- data and ends ------------------------------------------------------------------------------

  #takeData(builder: RecordBuilder, line: TextLine): void {
    const { text, number } = line;
    if (text.startsWith("M") && BLOCK_END.test(text)) {
      const message = "Another structure ends inside of the data: the line $$$$ before it is missing.";
      builder.refuse({ ...misplaced("S14", message), line: number });
      return;
    }
    this.#data.take(text, number);
    if (this.#data.count < MAX_COLUMNS) return;
    throw new IntakeRejection({
      code: "G11",
      ...this.#placeAt(number),
      message: `The limit is ${MAX_COLUMNS.toLocaleString("en-GB")} data fields a record, and this record has more.`,
      hint: "Leave out what is not needed, or bring it as a table.",
    });
  }

  #takeDelimiter(): void {
    const line = this.#lines.line;
    if (this.#builder === null) this.#begin(this.#head.end(line), "");
    else if (this.#mode !== "data") this.#cutOff(this.#builder, "$$$$ ends the record");
    this.#emit(this.#builder!, line);
  }

  #cutOff(builder: RecordBuilder, what: string): void {
    const { read, count, bondsRead, bondCount } = builder;
    const inside =
      this.#mode === "properties"
        ? "before its line M  END"
        : `after ${read} of ${count} atoms and ${bondsRead} of ${bondCount} bonds`;
    const hint = "The file may have been cut: copy it again, or leave the frame held.";
    builder.refuse({ ...misplaced("S14", `${what} ${inside}.`), hint, line: this.#lines.line });
  }

  #emit(builder: RecordBuilder, lastLine: number): void {
    this.#data.end();
    const place = {
      file: this.#file,
      number: this.#first + this.frames,
      lineCount: lastLine - builder.line + 1,
    };
    const frame = finishRecord(builder, this.#data, this.#topologies, place, this.#choices);
    this.frames += 1;
    if (frame.problem) this.held += 1;
    else this.#countTags(frame);
    this.#out.push(frame);
    this.#builder = null;
    this.#mode = "head";
    this.#data = new FieldCollector();
  }

  #countTags(frame: SdfFrame): void {
    for (const tag of frame.fields.keys()) {
      if (tag === EXACT_FIELD) continue;
      const seen = this.#tags.get(tag);
      if (seen !== undefined || this.#tags.size < COUNTED_TAGS) this.#tags.set(tag, (seen ?? 0) + 1);
    }
  }

  #finish(): void {
    const lastLine = this.#lines.line;
    if (this.#builder === null && !this.#head.isBlank) this.#begin(this.#head.end(lastLine), "");
    if (this.#builder) this.#endRecord(this.#builder, lastLine);
    this.#remarkTags();
    if (this.frames > 0) return;
    throw new IntakeRejection({
      code: "G06",
      file: this.#file,
      message: "The file has no frames.",
      hint: "An SDF holds one structure after the other, each ended by the line $$$$.",
    });
  }

  /** The last record has no delimiter. One MOL block alone needs none; an SDF does (row S13). */
  #endRecord(builder: RecordBuilder, lastLine: number): void {
    const isMolFile = this.frames === 0 && this.#data.isEmpty;
    if (this.#mode === "data" && !isMolFile) {
      this.#remark("S13", "The line $$$$ is missing at the end of the file.", lastLine);
    } else if (this.#mode !== "data" && this.#mode !== "skip") this.#cutOff(builder, "The file ends");
    this.#emit(builder, lastLine);
  }

  #remarkTags(): void {
    const sound = this.frames - this.held;
    for (const [tag, count] of this.#tags) {
      if (count === sound) continue;
      const name = quoteFound(tag);
      this.#remark("S19", `“${name}” stands in ${count} of ${sound} records; elsewhere it is missing.`);
    }
  }
}

/** `$$$$` and nothing but blanks behind it (row S13). */
function isDelimiter(lines: LineBuffer): boolean {
  const { bytes, from, to } = lines;
  if (to - from < 4) return false;
  for (let k = from; k < from + 4; k++) if (bytes[k] !== 36) return false;
  for (let k = from + 4; k < to; k++) if (bytes[k] !== 32 && bytes[k] !== 9) return false;
  return true;
}

/**
 * Frames of an SDF in file order; the summary is the generator's return value.
 *
 * @param source unpacked bytes in chunks of any size
 * @throws IntakeRejection as `SdfReader`
 * @example for await (const frame of readSdf(stream, { file: "run3.sdf" })) use(frame);
 */
export async function* readSdf(
  source: AsyncIterable<Uint8Array>,
  options: XyzOptions,
): AsyncGenerator<SdfFrame, XyzSummary> {
  const reader = new SdfReader(options);
  for await (const chunk of source) {
    // Cut here too, so that one huge chunk does not become one huge list of frames.
    for (let at = 0; at < chunk.length; at += PIECE_BYTES) {
      yield* reader.push(chunk.subarray(at, at + PIECE_BYTES));
    }
  }
  yield* reader.end();
  return reader.summary();
}
