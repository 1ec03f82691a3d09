import { type FrameRow, insertFrames, updateFrameStates } from "../../db/queries/insert-frames.server.ts";
import type { FrameState, HoldReason } from "../../lib/intake/report.ts";
import type { SdfFields } from "../../lib/sdf/frame.ts";
import { OneAhead } from "./one-ahead.ts";

/** Rows a statement: enough to be quick, few enough for every packet limit. */
const BATCH_ROWS = 500;
const BATCH_CHARACTERS = 4_000_000;
const COMMENT_BYTES = 65_000;

/** What a row of `frames` says of the frame itself, before anybody decides. */
export interface NewFrame {
  number: number;
  file: number;
  line: number;
  shape: number | null;
  indexInShape: number | null;
  label: string | null;
  comment: string;
  /** Data fields of an SDF record. */
  fields: SdfFields | null;
  /** Which atom of the file stands at each place, where the frame was put into another order. */
  mapping: Int32Array | null;
  state: FrameState;
  holdReason: HoldReason | null;
  note: string | null;
}

/** The state of a frame as its judge left it. */
export interface FrameDecision {
  number: number;
  state: FrameState;
  /** What a frame that waits for an answer is without that; the state itself where left out. */
  readState?: FrameState;
  holdReason: HoldReason | null;
  note: string | null;
}

/** The beginning of a text, in whole characters. */
function cutBytes(text: string, bytes: number): string {
  if (text.length * 3 <= bytes) return text;
  const whole = Buffer.from(text, "utf8");
  // A character cut in the middle comes back as a replacement character: leave it out.
  return whole.length <= bytes ? text : whole.toString("utf8", 0, bytes).replace(/\uFFFD+$/, "");
}

/** Data fields as their column keeps them: pairs in file order, a tag that stands twice twice. */
function packFields(fields: SdfFields | null): string | null {
  if (fields === null || fields.size === 0) return null;
  return JSON.stringify([...fields].flatMap(([name, values]) => values.map((value) => [name, value])));
}

const note = (text: string | null) => (text === null ? null : text.slice(0, 1000));

/** Writes rows of frames while their file is read, so that comments of any length never gather in memory. */
export class FrameWriter {
  private readonly ensembleId: string;
  private readonly ahead = new OneAhead();
  private rows: FrameRow[] = [];
  private characters = 0;

  constructor(ensembleId: string) {
    this.ensembleId = ensembleId;
  }

  async add(frame: NewFrame): Promise<void> {
    const fields = packFields(frame.fields);
    this.rows.push({
      ...frame,
      fields,
      mapping: frame.mapping === null ? null : JSON.stringify([...frame.mapping]),
      ensembleId: this.ensembleId,
      label: frame.label === null ? null : [...frame.label].slice(0, 200).join(""),
      comment: cutBytes(frame.comment, COMMENT_BYTES),
      readState: frame.state,
      note: note(frame.note),
    });
    this.characters += frame.comment.length + (fields?.length ?? 0);
    if (this.rows.length >= BATCH_ROWS || this.characters >= BATCH_CHARACTERS) await this.flush();
  }

  async end(): Promise<void> {
    await this.flush();
    await this.ahead.end();
  }

  private async flush(): Promise<void> {
    if (this.rows.length === 0) return;
    const rows = this.rows;
    this.rows = [];
    this.characters = 0;
    await this.ahead.push(() => insertFrames(rows));
  }
}

/** Sets the state that intake gives to frames whose row is there, many at a time. */
export async function writeDecisions(ensembleId: string, decisions: readonly FrameDecision[]): Promise<void> {
  for (let at = 0; at < decisions.length; at += BATCH_ROWS) {
    await updateFrameStates(
      decisions.slice(at, at + BATCH_ROWS).map((decision) => ({
        ensembleId,
        number: decision.number,
        file: 0,
        line: 0,
        shape: null,
        indexInShape: null,
        label: null,
        comment: "",
        fields: null,
        mapping: null,
        state: decision.state,
        readState: decision.readState ?? decision.state,
        holdReason: decision.holdReason,
        note: note(decision.note),
      })),
    );
  }
}
