import type { ReadingChoices } from "../intake/reading-choices.ts";
import { readCountLine } from "./count-line.ts";
import { FrameBuilder, type TextLine } from "./frame-builder.ts";

/** Faults of content, not of form: lines with them still count as atom lines when the next frame is looked for. */
const CONTENT_FAULTS = new Set(["X16", "X18", "X20"]);

export interface RestartOptions {
  readonly maxAtoms: number;
  /** Count lines of this file carry words of their own. */
  readonly anyCountNote: boolean;
  /**
   * "whole": a frame begins where a count line and all its N + 2 lines parse (after a broken frame, rows X08 and X10).
   * "start": count line, any comment and one atom line are enough (after notes behind a sound frame, row X11), so that
   * a broken frame behind a note is still seen.
   */
  readonly need: "whole" | "start";
  /** How to read what the file leaves open. */
  readonly choices?: ReadingChoices;
}

export interface Restart {
  readonly builder: FrameBuilder;
  /** The frame found has more atom lines than its count: they were passed already. */
  readonly overrun: boolean;
  /** The line last given does not belong to the frame found and must be looked at again. */
  readonly again: boolean;
}

type Step = "more" | "done" | "failed";

/**
 * Looks for the next frame line by line, without keeping text. Two candidates can live at once, no more: a lone whole
 * number can be the comment of the first and the count of the second, and any later one ends the first, whose atoms
 * have begun. Each line is read at most twice, so time stays linear.
 */
export class RestartSearch {
  readonly #options: RestartOptions;
  #first: FrameBuilder | null = null;
  #second: FrameBuilder | null = null;
  #secondDone = false;
  /** Lines behind a second candidate that was complete before the first one failed. */
  #behindSecond = 0;

  constructor(options: RestartOptions) {
    this.#options = options;
  }

  /** Gives one line; a result ends the search. */
  take(line: TextLine): Restart | null {
    const first = this.#first ? this.#feed(this.#first, line) : "failed";
    let second: Step = "failed";
    if (this.#second && this.#secondDone) {
      this.#behindSecond += 1;
      second = "done";
    } else if (this.#second) second = this.#feed(this.#second, line);
    this.#secondDone = second === "done";
    if (first === "done") return this.#found(this.#first, false, false);
    if (first === "failed") {
      if (second === "done" && this.#second) return this.#settleSecond();
      this.#first = second === "more" ? this.#second : null;
      this.#second = null;
    } else if (second === "failed") this.#second = null;
    this.#open(line);
    return null;
  }

  /** At the end of the file: a complete second candidate whose rival was cut off. */
  end(): Restart | null {
    if (!this.#second || !this.#secondDone) return null;
    return { builder: this.#second, overrun: this.#behindSecond > 0, again: false };
  }

  #settleSecond(): Restart | null {
    // The line that ended the first candidate lies behind the second; those before it were atom lines of the first.
    const behind = this.#behindSecond;
    return this.#found(this.#second, behind > 1, behind > 0);
  }

  #found(builder: FrameBuilder | null, overrun: boolean, again: boolean): Restart | null {
    return builder && { builder, overrun, again };
  }

  #open(line: TextLine): void {
    if (this.#first && this.#second) return;
    const count = readCountLine(line.text, this.#options.anyCountNote);
    if (!count || count.count < 1 || count.count > this.#options.maxAtoms) return;
    const builder = new FrameBuilder(count, line.number, this.#options.choices);
    if (!this.#first) this.#first = builder;
    else {
      this.#second = builder;
      this.#secondDone = false;
      this.#behindSecond = 0;
    }
  }

  #feed(builder: FrameBuilder, line: TextLine): Step {
    const whole = this.#options.need === "whole";
    if (builder.comment === null) {
      builder.takeComment(line);
      return whole && builder.fault !== null ? "failed" : "more";
    }
    if (!builder.takeAtom(line)) return "failed";
    const code = builder.fault?.code;
    if (whole && code !== undefined && !CONTENT_FAULTS.has(code)) return "failed";
    // One word behind a stray number is no atom line, even if the word is a symbol.
    if (code === "X24") return "failed";
    return builder.complete || !whole ? "done" : "more";
  }
}
