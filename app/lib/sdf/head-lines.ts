import type { AtomFault } from "../xyz/atom-line.ts";
import type { TextLine } from "../xyz/frame-builder.ts";
import { type Counts, readCountsLine } from "./counts-line.ts";
import { misplaced } from "./faults.ts";
import type { RecordHead, RecordRemark } from "./record-builder.ts";

/** The head of a record once its lines are there, or once it is clear that it has none. */
export interface HeadReading {
  readonly head: RecordHead;
  /** Null where `fault` says why. */
  readonly counts: Counts | null;
  /** The counts line; the record's first where there is none. */
  readonly line: number;
  readonly fault: (AtomFault & { readonly line: number }) | null;
  readonly remarks: readonly RecordRemark[];
}

const HEAD_LINES = 4;

/** The lines of a record up to its counts: title, program, comment, counts. */
export class HeadLines {
  /** The last lines at most; blank ones that are too many were let go. */
  #lines: TextLine[] = [];
  #blanks = 0;

  /** Nothing but blank lines came. */
  get isBlank(): boolean {
    return this.#lines.every((line) => line.text.trim() === "");
  }

  /** No line came, blank ones let go aside. */
  get isEmpty(): boolean {
    return this.#lines.length === 0;
  }

  /**
   * The next line.
   *
   * @returns null while more lines are needed
   */
  take(line: TextLine): HeadReading | null {
    this.#lines.push(line);
    if (this.#lines.length < HEAD_LINES) return null;
    const reading = readCountsLine(line.text);
    if (reading === null) {
      // A blank line too many before the title is passed over; a blank title itself is legal (rows S03, S04).
      if (this.#lines[0]!.text.trim() !== "") return this.#without(line);
      this.#lines.shift();
      this.#blanks += 1;
      return null;
    }
    if (reading.kind === "counts") return this.#with(reading.counts, line, null);
    return this.#with(null, line, refuseCounts(reading, line.text));
  }

  /** The record ends, or the file, before its counts. */
  end(line: number): HeadReading {
    const first = this.#lines[0]?.number ?? line;
    const fault = misplaced("S14", "The record ends before the counts of atoms and bonds.");
    return this.#give({ ...NO_HEAD, line: first }, null, first, { ...fault, line: first });
  }

  #with(counts: Counts | null, line: TextLine, fault: AtomFault | null): HeadReading {
    const [title, program, comment] = this.#lines as [TextLine, TextLine, TextLine];
    const head = {
      line: title.number,
      title: title.text,
      program: program.text,
      comment: comment.text,
    };
    return this.#give(head, counts, line.number, fault && { ...fault, line: line.number });
  }

  /** No counts where they should stand: the record cannot be read, wherever it began. */
  #without(line: TextLine): HeadReading {
    const first = this.#lines[0]!.number;
    const message = "The fourth line of the record should hold the counts of atoms and bonds.";
    const fault = { ...misplaced("S01", message, line.text), line: line.number };
    return this.#give({ ...NO_HEAD, line: first }, null, first, fault);
  }

  #give(head: RecordHead, counts: Counts | null, line: number, fault: HeadReading["fault"]): HeadReading {
    const remarks = this.#remarks(head, counts, line);
    this.#lines = [];
    this.#blanks = 0;
    return { head, counts, line, fault, remarks };
  }

  #remarks(head: RecordHead, counts: Counts | null, line: number): RecordRemark[] {
    const remarks: RecordRemark[] = [];
    if (this.#blanks > 0) {
      const what = this.#blanks === 1 ? "A blank line stands" : `${this.#blanks} blank lines stand`;
      const message = `${what} before the record; the format has none there. Passed over.`;
      remarks.push({ code: "S04", line: head.line - this.#blanks, message });
    }
    if (counts?.tagged === false) {
      const message = "The counts line names no version; the record is read as V2000.";
      remarks.push({ code: "S02", line, message });
    }
    return remarks;
  }
}

const NO_HEAD = { title: "", program: "", comment: "" };

function refuseCounts(
  reading: { kind: "overflow" } | { kind: "unknown-version"; version: string },
  found: string,
): AtomFault {
  if (reading.kind === "unknown-version") {
    return misplaced("S02", "The version of the record is neither V2000 nor V3000.", reading.version, 34);
  }
  return {
    code: "S06",
    reason: "unreadable",
    message: "The record has more than 999 atoms or bonds, for which V2000 has no room.",
    hint: "Write this record as V3000.",
    found,
  };
}
