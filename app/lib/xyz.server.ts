// One state machine and nothing else, longer than a file should be: its states share what waits for the next line.
// What a line means is in xyz/atom-line, count-line and frame-builder, where a search ends in xyz/restart-search.
import { DEFAULT_LIMITS, type FrameLimits } from "./intake/limits.ts";
import { AS_PROPOSED, type ReadingChoices } from "./intake/reading-choices.ts";
import type { IntakeMessage } from "./intake/report.ts";
import { decodeText, Utf8Stream } from "./text/decode.ts";
import { LineBuffer, PIECE_BYTES } from "./text/lines.ts";
import { readAtomLine } from "./xyz/atom-line.ts";
import { type CountLine, readCountLine } from "./xyz/count-line.ts";
import { type FramePlace, finishFrame } from "./xyz/finish-frame.ts";
import { brokenOff, cutOff, surplus } from "./xyz/form-faults.ts";
import { NOTE_LENGTH, type XyzFrame } from "./xyz/frame.ts";
import { type BuilderFault, FrameBuilder, type TextLine } from "./xyz/frame-builder.ts";
import { MAX_COLUMNS, PLAIN_LAYOUT } from "./xyz/layout.ts";
import { openCapitals, proposeCapitals } from "./xyz/open-frame.ts";
import { readPlainAtoms } from "./xyz/plain-atoms.ts";
import {
  type Place,
  refuseAtoms,
  refuseColumns,
  refuseEmpty,
  refuseFirstLine,
  refuseFrames,
} from "./xyz/refusals.ts";
import { type Restart, RestartSearch } from "./xyz/restart-search.ts";

/** Stored with every ensemble: the same bytes and answers read by the same version give the same frames. */
export const XYZ_READER_VERSION = "xyz 1";

export interface XyzOptions {
  /** File name for messages. */
  readonly file: string;
  /** Number of the first frame, when files before this one brought some; default 1. */
  readonly firstNumber?: number;
  readonly limits?: Partial<FrameLimits>;
  /** How to read what the file leaves open; left out: such frames are held. */
  readonly choices?: ReadingChoices;
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
  readonly #limits: FrameLimits;
  readonly #choices: ReadingChoices;
  /** Names in capitals mean the same in all frames: the first decides. */
  #capitals: "label" | "element" | null = null;
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
  /** Nothing but blank lines came since the broken range began: the file may simply end there. */
  #onlyBlank = false;
  /** The line taken last: where the file ends in its middle, it is no line. */
  #last: TextLine | null = null;
  #note: { line: number; text: string } | null = null;
  #blank = 0;
  #anyCountNote = false;
  #elements: Uint8Array = new Uint8Array(0);
  readonly #once = new Set<string>();

  constructor(options: XyzOptions) {
    this.#file = options.file;
    this.#first = options.firstNumber ?? 1;
    this.#limits = { ...DEFAULT_LIMITS, ...options.limits };
    this.#choices = options.choices ?? {};
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
    this.#last = line;
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
    else if (this.#waiting === null) refuseFirstLine(this.#file, line.number, line.text);
    else if (this.#continues(line, this.#waiting)) this.#surplus(this.#waiting, line);
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
    this.#checkLimits(count, line.number);
    this.#builder = new FrameBuilder(count, line.number, this.#choices);
    this.#mode = "comment";
  }

  #remarkBlank(): void {
    const message = "Blank lines stand between frames; the format has none there. They are passed over.";
    this.#remarkOnce("X07", { line: this.#blank, message });
    this.#blank = 0;
  }

  #checkLimits(count: CountLine, line: number): void {
    const place = this.#place(line);
    if (place.frame > this.#limits.frames) refuseFrames(place, this.#limits.frames);
    if (count.count > this.#limits.atoms) refuseAtoms(place, this.#limits.atoms, count.text);
  }

  #checkColumns(builder: FrameBuilder, line: number): void {
    const columns = Math.max(builder.layout?.columns ?? 0, builder.extra + 4);
    if (columns > MAX_COLUMNS) refuseColumns(this.#place(line), columns);
  }

  #place(line: number): Place {
    return { file: this.#file, line, frame: this.#number() };
  }

  // --- inside of a frame --------------------------------------------------------------------------

  #takeComment(line: TextLine): void {
    const builder = this.#builder!;
    builder.takeComment(line);
    this.#checkColumns(builder, line.number);
    this.#mode = "atoms";
    if (builder.complete) this.#completed(builder);
  }

  #takeAtom(line: TextLine): void {
    const builder = this.#builder!;
    if (!builder.takeAtom(line)) {
      this.#breakOff(builder, line);
      return;
    }
    this.#checkColumns(builder, line.number);
    if (builder.complete) this.#completed(builder);
  }

  #completed(builder: FrameBuilder): void {
    this.#checkColumns(builder, builder.line + 2);
    this.#waiting = builder;
    this.#builder = null;
    this.#blank = 0;
    this.#mode = "count";
  }

  // --- broken ranges and notes --------------------------------------------------------------------

  #breakOff(builder: FrameBuilder, line: TextLine): void {
    this.#startBroken(builder, brokenOff(builder, line, this.#number()));
    this.#onlyBlank = true;
    this.#takeSearching(line);
  }

  #surplus(builder: FrameBuilder, line: TextLine): void {
    this.#waiting = null;
    this.#startBroken(builder, surplus(builder, line.number, this.#number()));
    this.#takeSearching(line);
  }

  #startBroken(builder: FrameBuilder, fault: BuilderFault): void {
    this.#broken = { builder, fault };
    this.#builder = null;
    this.#onlyBlank = false;
    this.#mode = "broken";
    this.#search = new RestartSearch({
      maxAtoms: this.#limits.atoms,
      need: "whole",
      anyCountNote: this.#anyCountNote,
      choices: this.#choices,
    });
  }

  /** A frame found complete whose surplus lines have passed already. */
  #startOverrun(builder: FrameBuilder): void {
    this.#startBroken(builder, surplus(builder, builder.line + builder.count + 2, this.#number()));
  }

  #beginNote(line: TextLine): void {
    this.#note = { line: line.number, text: "" };
    this.#mode = "note";
    this.#search = new RestartSearch({
      maxAtoms: this.#limits.atoms,
      need: "start",
      anyCountNote: this.#anyCountNote,
      choices: this.#choices,
    });
    this.#takeSearching(line);
  }

  #takeSearching(line: TextLine): void {
    if (line.text.trim() !== "") this.#onlyBlank = false;
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
    this.#checkLimits(builder.countLine, builder.line);
    this.#checkColumns(builder, line.number);
    if (found.overrun) {
      this.#startOverrun(builder);
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
    this.#settleCapitals(builder);
    const { elements: own, fault } = builder;
    const elements = fault || rest.fault ? own : this.#shareElements(own);
    const frame = finishFrame(builder, { file: this.#file, number: this.#number(), elements, ...rest });
    this.frames += 1;
    if (frame.problem) this.held += 1;
    else if (builder.numbersForSymbols > 0) {
      const message = "Atoms are given by atomic numbers; they are read as their elements.";
      this.#remarkOnce("X18", { line: builder.numbersForSymbols, message });
    }
    this.#out.push(frame);
  }

  /** Names in capitals become elements, or stay labels, as chosen or as the bonds of the first frame say. */
  #settleCapitals(builder: FrameBuilder): void {
    const { capitals, elements, positions, labels } = builder;
    const first = capitals[0];
    if (!first || builder.fault) return;
    const choice = this.#choices.capitals;
    const chosen = choice === "label" || choice === "element" ? choice : null;
    this.#capitals ??= chosen ?? proposeCapitals(capitals, elements, positions);
    if (choice === AS_PROPOSED) {
      builder.noteOpen(openCapitals(capitals, this.#capitals, builder.line + 2 + first.atom));
    }
    if (this.#capitals === "label") return;
    for (const { atom, two } of capitals) {
      elements[atom] = two;
      if (labels) labels[atom] = null;
    }
  }

  /** The array of the frame before where it says the same. */
  #shareElements(elements: Uint8Array): Uint8Array {
    if (!sameBytes(this.#elements, elements)) this.#elements = elements;
    return this.#elements;
  }

  /**
   * The fault of a frame that the file ends inside of: one on its last line is the end of the file, too.
   *
   * @param inLine the last line is no whole atom line
   */
  #cutOff(builder: FrameBuilder, inLine: boolean): BuilderFault | null {
    const last = inLine ? this.#last : null;
    const fault = cutOff(builder, this.#number(), last);
    if (fault && last && builder.fault?.line === last.number) builder.fault = null;
    return fault;
  }

  /** What looks broken only because the file ends there is cut off (row X09). */
  #blameEnd(): void {
    const atEnd = (line: number | undefined) => this.#lines.open && line === this.#last?.number;
    const broken = this.#broken;
    if (broken?.fault.code === "X08" && (this.#onlyBlank || atEnd(broken.fault.line))) {
      const fault = this.#cutOff(broken.builder, !this.#onlyBlank);
      if (fault) this.#broken = { builder: broken.builder, fault };
    }
    const waiting = this.#waiting;
    if (waiting?.fault && atEnd(waiting.fault.line)) waiting.fault = this.#cutOff(waiting, true);
  }

  #finish(): void {
    this.#blameEnd();
    const next = this.#lines.line + 1;
    const found = this.#mode === "broken" ? this.#search?.end() : null;
    if (found) {
      this.#flush(found.builder.line);
      if (found.overrun) {
        this.#startOverrun(found.builder);
      } else this.#waiting = found.builder;
    }
    this.#flush(next);
    const cut = this.#builder;
    if (cut) {
      const fault = this.#cutOff(cut, cut.fault?.line === this.#last?.number);
      this.#emit(cut, { lineCount: next - cut.line, fault, noteLines: null });
    }
    if (this.frames === 0) refuseEmpty(this.#file);
  }
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
