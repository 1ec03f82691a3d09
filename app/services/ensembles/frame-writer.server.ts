import { sql } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { frames } from "../../db/schema.server.ts";
import type { FrameState, HoldReason } from "../../lib/intake/report.ts";

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
  state: FrameState;
  holdReason: HoldReason | null;
  note: string | null;
}

/** The state of a frame as its judge left it. */
export interface FrameDecision {
  number: number;
  state: FrameState;
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

const note = (text: string | null) => (text === null ? null : text.slice(0, 1000));

/** Writes rows of frames while their file is read, so that comments of any length never gather in memory. */
export class FrameWriter {
  private readonly ensembleId: string;
  private rows: NewFrame[] = [];
  private characters = 0;

  constructor(ensembleId: string) {
    this.ensembleId = ensembleId;
  }

  async add(frame: NewFrame): Promise<void> {
    this.rows.push(frame);
    this.characters += frame.comment.length;
    if (this.rows.length >= BATCH_ROWS || this.characters >= BATCH_CHARACTERS) await this.end();
  }

  async end(): Promise<void> {
    if (this.rows.length === 0) return;
    const rows = this.rows;
    this.rows = [];
    this.characters = 0;
    await db.insert(frames).values(
      rows.map((row) => ({
        ...row,
        ensembleId: this.ensembleId,
        label: row.label === null ? null : [...row.label].slice(0, 200).join(""),
        comment: cutBytes(row.comment, COMMENT_BYTES),
        readState: row.state,
        note: note(row.note),
      })),
    );
  }
}

/** Sets the state that intake gives to frames whose row is there, many at a time. */
export async function writeDecisions(
  tx: Queryable,
  ensembleId: string,
  decisions: readonly FrameDecision[],
): Promise<void> {
  for (let at = 0; at < decisions.length; at += BATCH_ROWS) {
    // The rows exist: only what stands behind "on duplicate key" is written. One statement instead of hundreds.
    await tx
      .insert(frames)
      .values(
        decisions.slice(at, at + BATCH_ROWS).map((decision) => ({
          ensembleId,
          number: decision.number,
          file: 0,
          line: 0,
          comment: "",
          state: decision.state,
          readState: decision.state,
          holdReason: decision.holdReason,
          note: note(decision.note),
        })),
      )
      .onDuplicateKeyUpdate({
        set: {
          state: sql`values(${frames.state})`,
          readState: sql`values(${frames.readState})`,
          holdReason: sql`values(${frames.holdReason})`,
          note: sql`values(${frames.note})`,
        },
      });
  }
}
