import { pool } from "../client.server.ts";

/** A row of `frames` in the order of its columns below. */
export interface FrameRow {
  ensembleId: string;
  number: number;
  file: number;
  line: number;
  shape: number | null;
  indexInShape: number | null;
  label: string | null;
  comment: string;
  /** JSON texts. */
  fields: string | null;
  mapping: string | null;
  state: string;
  readState: string;
  holdReason: string | null;
  note: string | null;
}

const COLUMNS =
  "ensemble_id, number, file, line, shape, index_in_shape, label, comment, fields, mapping, state, read_state, hold_reason, note";

const values = (rows: readonly FrameRow[]) =>
  rows.map((row) => [
    row.ensembleId,
    row.number,
    row.file,
    row.line,
    row.shape,
    row.indexInShape,
    row.label,
    row.comment,
    row.fields,
    row.mapping,
    row.state,
    row.readState,
    row.holdReason,
    row.note,
  ]);

// Tens of thousands of rows: the query builder would take longer to write them than the reader to read them. The driver
// escapes every value.

/** Adds rows of frames. */
export async function insertFrames(rows: readonly FrameRow[]): Promise<void> {
  await pool().query(`insert into frames (${COLUMNS}) values ?`, [values(rows)]);
}

/** Sets state, reason and note of frames that are there; what else stands in the rows is not written. */
export async function updateFrameStates(rows: readonly FrameRow[]): Promise<void> {
  await pool().query(
    `insert into frames (${COLUMNS}) values ? on duplicate key update state = values(state),
      read_state = values(read_state), hold_reason = values(hold_reason), note = values(note)`,
    [values(rows)],
  );
}
