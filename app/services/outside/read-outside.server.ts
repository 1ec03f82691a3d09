import { perceiveBonds } from "../../lib/chem/bonds.ts";
import { DomainError } from "../../lib/errors.ts";
import { plural } from "../../lib/format.ts";
import { formatMessage } from "../../lib/intake/format-message.ts";
import { isSdfFrame } from "../../lib/sdf/frame.ts";
import { SdfReader } from "../../lib/sdf.server.ts";
import type { XyzFrame } from "../../lib/xyz/frame.ts";
import { XyzReader } from "../../lib/xyz.server.ts";
import { checkFormat } from "../ensembles/check-format.ts";
import { openFile } from "../ensembles/open-file.server.ts";

/** Generous for one structure with its surroundings, and small enough to be read at once. */
export const OUTSIDE_BYTES = 8 * 2 ** 20;

export interface ReadOutside {
  frame: XyzFrame;
  /** Flat pairs from 0: the file's where it has a table, else by distance. */
  bonds: Int32Array;
  remarks: string[];
}

function refused(file: string, message: string): DomainError {
  return new DomainError("invalid", "The structure was not taken", message, {
    faults: [{ field: "file", file, message }],
  });
}

/**
 * Reads one structure from an XYZ or SDF file, plain or gzip; of several the first counts.
 *
 * @throws DomainError invalid where the file or the structure cannot be used, too-large beyond the limit
 */
export async function readOutside(file: string, source: AsyncIterable<Uint8Array>): Promise<ReadOutside> {
  const remarks: string[] = [];
  const opened = await openFile(source, { file, limit: OUTSIDE_BYTES, remark: () => {} });
  const { format, bytes } = await checkFormat(file, opened.bytes, () => {});
  // A crystal or a pose may well come without hydrogens: its bonds need not leave room for any.
  const reader =
    format === "sdf" ? new SdfReader({ file, choices: { hydrogens: "heavy" } }) : new XyzReader({ file });
  const frames: XyzFrame[] = [];
  let count = 0;
  const take = (read: readonly XyzFrame[]) => {
    count += read.length;
    if (frames.length === 0) frames.push(...read.slice(0, 1));
  };
  for await (const chunk of bytes) take(reader.push(chunk));
  take(reader.end());
  const frame = frames[0];
  if (frame === undefined) throw refused(file, "The file holds no structure. Send one as XYZ or SDF.");
  if (frame.problem) throw refused(file, formatMessage(frame.problem));
  if (count > 1) remarks.push(`The file holds ${plural(count, "structure")}; the first was taken.`);
  const flat = frame.positions.every((value, k) => k % 3 !== 2 || value === frame.positions[2]);
  if (frame.elements.length > 3 && (flat || (isSdfFrame(frame) && frame.dimension === 2))) {
    // A planar molecule may lie in a plane, but hardly in z = constant with every digit.
    throw refused(
      file,
      "The structure is a flat drawing: all its atoms have the same z. Send one with coordinates in three dimensions.",
    );
  }
  const table = isSdfFrame(frame) ? frame.bonds : new Int32Array(0);
  return {
    frame,
    bonds: table.length > 0 ? table : perceiveBonds(frame.elements, frame.positions).bonds,
    remarks,
  };
}
