import { IntakeRejection } from "./intake/reject.ts";
import type { IntakeMessage } from "./intake/report.ts";
import { decodeText, Utf8Stream } from "./text/decode.ts";
import { quoteFound } from "./text/escape.ts";
import { LineBuffer, PIECE_BYTES } from "./text/lines.ts";
import { looksLikeAtom, readAtomLine } from "./xyz/atom-line.ts";
import { type CountLine, readCountLine } from "./xyz/count-line.ts";
import { type FramePlace, finishFrame } from "./xyz/finish-frame.ts";
import { NOTE_LENGTH, type XyzFrame } from "./xyz/frame.ts";
import { type BuilderFault, FrameBuilder, type TextLine } from "./xyz/frame-builder.ts";
import { MAX_COLUMNS, PLAIN_LAYOUT } from "./xyz/layout.ts";
import { readPlainAtoms } from "./xyz/plain-atoms.ts";
import { type Restart, RestartSearch } from "./xyz/restart-search.ts";

/** Stored with every ensemble: the same bytes and answers read by the same version give the same frames. */
export const XYZ_READER_VERSION = "xyz 1";

export interface XyzLimits {
  /** Highest frame number, over all files of an upload. */
  readonly frames: number;
  /** Atoms of one frame. */
  readonly atoms: number;
}

export const DEFAULT_LIMITS: XyzLimits = { frames: 50_000, atoms: 1000 };

export interface XyzOptions {
  /** File name for messages. */
  readonly file: string;
  /** Number of the first frame, when files before this one brought some; default 1. */
  readonly firstNumber?: number;
  readonly limits?: Partial<XyzLimits>;
}

/** What a file came to. */
export interface XyzSummary {
  readonly frames: number;
  /** Frames with a `problem`. */
  readonly held: number;
  readonly lines: number;
  /** Messages on the file as a whole; those on frames travel with the frames. */
  readonly messages: readonly IntakeMessage[];
}

type Mode = "count" | "comment" | "atoms" | "broken" | "note";

/**
 * Reader of plain and extended XYZ that is fed with bytes and gives frames in file order. It holds one unfinished
 * line and at most three frames, whatever the file; time is linear in the bytes.
 *
 * A frame comes out once the line behind it is known, as surplus atoms hold it (row X10).
 *
 * @throws IntakeRejection where the file is refused: no count on the first line (X03), no frames (G06), NUL bytes
 *   (G04), a limit (G11)
 * @example
 * const reader = new XyzReader({ file: "run3.xyz" });
 * for (const chunk of chunks) use(reader.push(chunk));
 * use(reader.end());
 */
export class XyzReader {
  readonly messages: IntakeMessage[] = [];
  /** Frames given out so far, and how many of them are held. */
  frames = 0;
  held = 0;

  readonly #file: string;
  readonly #first: number;
  readonly #limits: XyzLimits;
  readonly #text = new Utf8Stream();
  readonly #lines: LineBuffer;
  #out: XyzFrame[] = [];
  #mode: Mode = "count";
  /** The frame in the making, and the complete one that waits for the line behind it. */
  #builder: FrameBuilder | null = null;
  #waiting: FrameBuilder | null = null;
  /** Where a broken range begins and why. */
  #broken: { builder: FrameBuilder; fault: BuilderFault } | null = null;
  #search: RestartSearch | null = null;
  #note: { line: number; text: string } | null = null;
  #blank = 0;
  #anyCountNote = false;
  #elements: Uint8Array = new Uint8Array(0);
  readonly #once = new Set<string>();

  constructor(options: XyzOptions) {
    this.#file = options.file;
    this.#first = options.firstNumber ?? 1;
    this.#limits = { ...DEFAULT_LIMITS, ...options.limits };
    this.#lines = new LineBuffer(options.file);
  }

  /** Takes the next bytes; returns the frames that they completed. Chunks may end anywhere. */
  push(chunk: Uint8Array): XyzFrame[] {
    const bytes = this.#text.push(chunk);
    for (let at = 0; at < bytes.length; at += PIECE_BYTES) {
      this.#lines.append(bytes.subarray(at, at + PIECE_BYTES));
      this.#drain();
    }
    return this.#give();
  }

  /** The file ends: returns the last frames. */
  end(): XyzFrame[] {
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

  #give(): XyzFrame[] {
    const out = this.#out;
    this.#out = [];
    return out;
  }

  #drain(): void {
    const lines = this.#lines;
    for (;;) {
      const builder = this.#builder;
      // A line known to be unfinished goes the slow way, or a trickle of bytes would read it again and again.
      if (this.#mode === "atoms" && builder?.plain && !lines.unfinished) {
        readPlainAtoms(lines, builder);
        if (builder.complete) {
          this.#completed(builder);
          continue;
        }
      }
      if (!lines.next()) return;
      this.#take(this.#decode());
    }
  }

  #decode(): TextLine {
    const { text, legacy } = decodeText(this.#lines.bytes, this.#lines.from, this.#lines.to);
    const number = this.#lines.line;
    if (legacy) {
      this.#remarkOnce("G03", {
        line: number,
        message:
          "Some text is not UTF-8; it was read as Windows-1252. Labels may look odd, coordinates are not touched.",
      });
    }
    return { text, number };
  }

  #remarkOnce(code: string, message: { line: number; message: string; hint?: string }): void {
    if (this.#once.has(code)) return;
    this.#once.add(code);
    this.messages.push({ code, severity: "remark", file: this.#file, ...message });
  }

  #take(line: TextLine): void {
    switch (this.#mode) {
      case "count":
        this.#takeBetween(line);
        break;
      case "comment":
        this.#takeComment(line);
        break;
      case "atoms":
        this.#takeAtom(line);
        break;
      case "broken":
      case "note":
        this.#takeSearching(line);
        break;
    }
  }

  // --- between frames -----------------------------------------------------------------------------

  #takeBetween(line: TextLine): void {
    if (line.text.trim() === "") {
      if (this.#blank === 0) this.#blank = line.number;
      return;
    }
    const first = this.#waiting === null && this.frames === 0;
    const count = readCountLine(line.text, first || this.#anyCountNote);
    if (count) this.#begin(count, line);
    else if (this.#waiting === null) this.#refuseFirstLine(line);
    else if (this.#continues(line, this.#waiting)) this.#surplus(line);
    else this.#beginNote(line);
  }

  /** One more atom line behind a complete frame, be its numbers sound or not. */
  #continues(line: TextLine, frame: FrameBuilder): boolean {
    const result = readAtomLine(line.text, frame.layout ?? PLAIN_LAYOUT, new Float64Array(3), 0);
    if (result.kind === "fault") return result.fault.code === "X22" || result.fault.code === "X23";
    return result.kind === "atom";
  }

  #begin(count: CountLine, line: TextLine): void {
    if (this.#blank > 0) this.#remarkBlank();
    this.#flush(line.number);
    if (count.note !== null && !readCountLine(line.text, false)) this.#anyCountNote = true;
    this.#checkLimits(count, line);
    this.#builder = new FrameBuilder(count, line.number);
    this.#mode = "comment";
  }

  #remarkBlank(): void {
    const message = "Blank lines stand between frames; the format has none there. They are passed over.";
    this.#remarkOnce("X07", { line: this.#blank, message });
    this.#blank = 0;
  }

  #checkLimits(count: CountLine, line: TextLine): void {
    const limits = this.#limits;
    const number = this.#number();
    if (number > limits.frames) {
      throw new IntakeRejection({
        code: "G11",
        file: this.#file,
        line: line.number,
        frame: number,
        message: `The limit is ${thousands(limits.frames)} frames, and frame ${thousands(number)} begins here.`,
        hint: "Split the file, or narrow the energy window before the upload.",
      });
    }
    if (count.count <= limits.atoms) return;
    throw new IntakeRejection({
      code: "G11",
      file: this.#file,
      line: line.number,
      frame: number,
      found: quoteFound(count.text),
      message: `The limit is ${thousands(limits.atoms)} atoms a frame, and this frame announces more.`,
      hint: "Take solvent or surroundings out before the upload.",
    });
  }

  #refuseFirstLine(line: TextLine): never {
    const atoms = looksLikeAtom(line.text, PLAIN_LAYOUT);
    throw new IntakeRejection({
      code: "X03",
      file: this.#file,
      line: line.number,
      found: quoteFound(line.text.trim()),
      message: `Line ${line.number} should hold the atom count.`,
      hint: atoms
        ? "These look like atoms without a header: put a line with their count and a comment line before them."
        : "XYZ begins with a line that holds the number of atoms and nothing else.",
    });
  }

  // --- inside of a frame --------------------------------------------------------------------------

  #takeComment(line: TextLine): void {
    const builder = this.#builder!;
    builder.takeComment(line);
    this.#checkColumns(builder, line);
    this.#mode = "atoms";
    if (builder.complete) this.#completed(builder);
  }

  #checkColumns(builder: FrameBuilder, line: TextLine): void {
    const columns = Math.max(builder.layout?.columns ?? 0, builder.extra + 4);
    if (columns <= MAX_COLUMNS) return;
    throw new IntakeRejection({
      code: "G11",
      file: this.#file,
      line: line.number,
      frame: this.#number(),
      found: String(columns),
      message: `The limit is ${thousands(MAX_COLUMNS)} columns a line, and this file has more.`,
      hint: "Leave out what is not needed, or bring it as a table.",
    });
  }

  #takeAtom(line: TextLine): void {
    const builder = this.#builder!;
    if (!builder.takeAtom(line)) {
      this.#breakOff(builder, line);
      return;
    }
    this.#checkColumns(builder, line);
    if (builder.complete) this.#completed(builder);
  }

  #completed(builder: FrameBuilder): void {
    this.#checkColumns(builder, { text: "", number: builder.line + 2 });
    this.#waiting = builder;
    this.#builder = null;
    this.#blank = 0;
    this.#mode = "count";
  }

  // --- broken ranges and notes --------------------------------------------------------------------

  #breakOff(builder: FrameBuilder, line: TextLine): void {
    const then = readCountLine(line.text, false)
      ? "the next count"
      : line.text.trim() === ""
        ? "a blank line"
        : "text";
    const missingComment = builder.commentLikeAtom
      ? ` Line ${builder.line + 1} looks like an atom: is the comment line missing?`
      : "";
    this.#startBroken(builder, {
      code: "X08",
      reason: "unreadable",
      line: line.number,
      message: `Frame ${this.#number()} has ${builder.read} of its ${builder.count} atoms; then comes ${then}.`,
      hint: `Correct the frame in the file, or leave it held.${missingComment}`,
      ...(line.text.trim() === "" ? {} : { found: line.text.trim() }),
    });
    this.#takeSearching(line);
  }

  #surplus(line: TextLine): void {
    const builder = this.#waiting!;
    this.#waiting = null;
    this.#startBroken(builder, this.#surplusFault(builder, line.number));
    this.#takeSearching(line);
  }

  #surplusFault(builder: FrameBuilder, line: number): BuilderFault {
    return {
      code: "X10",
      reason: "unreadable",
      line,
      message: `Frame ${this.#number()} has more atom lines than its count of ${builder.count}.`,
      hint: "Correct the count in the file, or leave the frame held.",
    };
  }

  #startBroken(builder: FrameBuilder, fault: BuilderFault): void {
    this.#broken = { builder, fault };
    this.#builder = null;
    this.#mode = "broken";
    this.#search = new RestartSearch({
      maxAtoms: this.#limits.atoms,
      need: "whole",
      anyCountNote: this.#anyCountNote,
    });
  }

  #beginNote(line: TextLine): void {
    this.#note = { line: line.number, text: "" };
    this.#mode = "note";
    this.#search = new RestartSearch({
      maxAtoms: this.#limits.atoms,
      need: "start",
      anyCountNote: this.#anyCountNote,
    });
    this.#takeSearching(line);
  }

  #takeSearching(line: TextLine): void {
    const found = this.#search!.take(line);
    if (this.#note && this.#note.text.length < NOTE_LENGTH) {
      this.#note.text += `${line.text.slice(0, NOTE_LENGTH)}\n`;
    }
    if (found) this.#resume(found, line);
  }

  /** The next frame was found: what lies before it is settled, then reading goes on inside or behind it. */
  #resume(found: Restart, line: TextLine): void {
    const { builder } = found;
    this.#search = null;
    this.#flush(builder.line);
    this.#checkLimits(builder.countLine, { text: "", number: builder.line });
    this.#checkColumns(builder, line);
    if (found.overrun) {
      this.#startBroken(builder, this.#surplusFault(builder, builder.line + builder.count + 2));
    } else if (builder.complete) this.#completed(builder);
    else {
      this.#builder = builder;
      this.#mode = "atoms";
    }
    if (found.again) this.#take(line);
  }

  // --- giving frames out --------------------------------------------------------------------------

  /** Number of the frame that is given out next. */
  #number(): number {
    return this.#first + this.frames;
  }

  /** Gives out what waits, a complete frame with the note behind it or a broken range; `next` is the line behind. */
  #flush(next: number): void {
    if (this.#broken) {
      const { builder, fault } = this.#broken;
      this.#broken = null;
      this.#emit(builder, { lineCount: next - builder.line, fault, noteLines: null });
    } else if (this.#waiting) {
      const builder = this.#waiting;
      this.#waiting = null;
      this.#emit(builder, { lineCount: builder.count + 2, fault: null, noteLines: this.#noteLines(next) });
    }
    this.#note = null;
  }

  /** The lines of the note without those of the frame behind it, which were looked at as note first. */
  #noteLines(next: number): { line: number; text: string } | null {
    const note = this.#note;
    if (!note) return null;
    const kept = note.text.split("\n").slice(0, next - note.line);
    return { line: note.line, text: kept.join("\n").trim() };
  }

  #emit(builder: FrameBuilder, rest: Pick<FramePlace, "lineCount" | "fault" | "noteLines">): void {
    const elements = this.#shareElements(builder.elements);
    const frame = finishFrame(builder, { file: this.#file, number: this.#number(), elements, ...rest });
    this.frames += 1;
    if (frame.problem) this.held += 1;
    else if (builder.numbersForSymbols > 0) {
      const message = "Atoms are given by atomic numbers; they are read as their elements.";
      this.#remarkOnce("X18", { line: builder.numbersForSymbols, message });
    }
    this.#out.push(frame);
  }

  /** The array of the frame before where it says the same. */
  #shareElements(elements: Uint8Array): Uint8Array {
    if (!sameBytes(this.#elements, elements)) this.#elements = elements;
    return this.#elements;
  }

  #finish(): void {
    const next = this.#lines.line + 1;
    const found = this.#mode === "broken" ? this.#search?.end() : null;
    if (found) {
      this.#flush(found.builder.line);
      if (found.overrun) {
        this.#startBroken(
          found.builder,
          this.#surplusFault(found.builder, found.builder.line + found.builder.count + 2),
        );
      } else this.#waiting = found.builder;
    }
    this.#flush(next);
    if (this.#builder) this.#cutOff(this.#builder, next);
    if (this.frames > 0) return;
    throw new IntakeRejection({
      code: "G06",
      file: this.#file,
      message: "The file has no frames.",
      hint: "XYZ begins with a line that holds the number of atoms.",
    });
  }

  #cutOff(builder: FrameBuilder, next: number): void {
    const fault: BuilderFault | null =
      builder.count === 0
        ? null
        : {
            code: "X09",
            reason: "unreadable",
            line: builder.line,
            message: `Frame ${this.#number()} has ${builder.read} of its ${builder.count} atoms; then the file ends.`,
            hint: "The file was cut: copy it again, or leave the frame held.",
          };
    this.#emit(builder, { lineCount: next - builder.line, fault, noteLines: null });
  }
}

function thousands(value: number): string {
  return value.toLocaleString("en-GB");
}

function sameBytes(a: Uint8Array, b: Uint8Array): boolean {
  if (a.length !== b.length) return false;
  for (let k = 0; k < a.length; k++) if (a[k] !== b[k]) return false;
  return true;
}

/**
 * Frames of an XYZ file in file order; the summary is the generator's return value.
 *
 * @param source unpacked bytes in chunks of any size
 * @throws IntakeRejection as `XyzReader`
 * @example for await (const frame of readXyz(stream, { file: "run3.xyz" })) use(frame);
 */
export async function* readXyz(
  source: AsyncIterable<Uint8Array>,
  options: XyzOptions,
): AsyncGenerator<XyzFrame, XyzSummary> {
  const reader = new XyzReader(options);
  for await (const chunk of source) {
    // Cut here too, so that one huge chunk does not become one huge list of frames.
    for (let at = 0; at < chunk.length; at += PIECE_BYTES) {
      yield* reader.push(chunk.subarray(at, at + PIECE_BYTES));
    }
  }
  yield* reader.end();
  return reader.summary();
}
