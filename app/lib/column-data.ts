/** Values of one quantity by frame number. Absent is a bit, never NaN or 0. */
export interface ColumnData {
  /** Index 0 is frame 1; 0 where absent. */
  values: Float64Array;
  /** 1 where the frame has a value. */
  present: Uint8Array;
}

/**
 * Packs a column: little-endian doubles in frame order, then one presence bit a frame (frame 1 is bit 0 of byte 0).
 *
 * @throws RangeError on unequal lengths or a present value that is no finite number
 * @example packColumn({ values: Float64Array.of(1.5), present: Uint8Array.of(1) }).length // 9
 */
export function packColumn(column: ColumnData): Uint8Array {
  const { values, present } = column;
  const n = values.length;
  if (present.length !== n) throw new RangeError(`${n} values but ${present.length} presence marks.`);
  const packed = new Uint8Array(8 * n + Math.ceil(n / 8));
  const view = new DataView(packed.buffer);
  for (let i = 0; i < n; i++) {
    if (present[i] !== 1) continue;
    if (!Number.isFinite(values[i]!))
      throw new RangeError(`The value of frame ${i + 1} is no finite number.`);
    // -0 may come back from the database as 0; written so at once, its checksum never changes.
    view.setFloat64(8 * i, values[i]! + 0, true);
    packed[8 * n + (i >> 3)]! |= 1 << (i & 7);
  }
  return packed;
}

/**
 * Unpacks what `packColumn` made.
 *
 * @throws RangeError when the bytes do not belong to so many frames
 */
export function unpackColumn(packed: Uint8Array, frames: number): ColumnData {
  if (packed.length !== 8 * frames + Math.ceil(frames / 8)) {
    throw new RangeError(`${packed.length} bytes are no column of ${frames} frames.`);
  }
  const view = new DataView(packed.buffer, packed.byteOffset, packed.byteLength);
  const values = new Float64Array(frames);
  for (let i = 0; i < frames; i++) values[i] = view.getFloat64(8 * i, true);
  return { values, present: unpackPresence(packed.subarray(8 * frames), frames) };
}

/**
 * How many frames a packed column speaks of. A reader without a lock takes it from here: a batch may have come between
 * its looks at the ensemble and at the column.
 *
 * @example packedFrames(packColumn({ values: new Float64Array(12), present: new Uint8Array(12) })) // 12
 */
export function packedFrames(packed: Uint8Array): number {
  return Math.floor((packed.length * 8) / 65);
}

/** Presence marks from the tail of a packed column alone. */
export function unpackPresence(bits: Uint8Array, frames: number): Uint8Array {
  const present = new Uint8Array(frames);
  for (let i = 0; i < frames; i++) present[i] = (bits[i >> 3]! >> (i & 7)) & 1;
  return present;
}
