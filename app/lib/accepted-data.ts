/**
 * Accepted frames of an ensemble as one run of bytes, for the threads of a browser: what a sift runs on, bit by bit, so
 * that its answers are the server's. Little-endian, as every processor that runs a browser stores numbers.
 */
export interface AcceptedData {
  /** The molecule: one entry an atom, and bonds as flat pairs from 0. */
  elements: Uint8Array;
  isotopes: Uint16Array;
  bonds: Int32Array;
  /** Frame number of each row, from 1. */
  numbers: Int32Array;
  /** In their own unit as written; null where none were asked for. */
  energies: { values: Float64Array; present: Uint8Array } | null;
  /** [frame][atom][x, y, z] in Å. */
  positions: Float64Array;
}

const HEADER_NUMBERS = 6;
const VERSION = 1;

const even = (bytes: number) => Math.ceil(bytes / 8) * 8;

interface Sizes {
  atoms: number;
  bonds: number;
  count: number;
  energies: boolean;
}

/** Where each part begins: every one at a multiple of eight bytes. */
function layOut({ atoms, bonds, count, energies }: Sizes) {
  const elements = 4 * HEADER_NUMBERS;
  const isotopes = elements + even(atoms);
  const bondsAt = isotopes + even(2 * atoms);
  const numbers = bondsAt + even(4 * bonds);
  const values = numbers + even(4 * count);
  const present = values + (energies ? 8 * count : 0);
  const positions = present + (energies ? even(count) : 0);
  return {
    elements,
    isotopes,
    bonds: bondsAt,
    numbers,
    values,
    present,
    positions,
    end: positions + 24 * atoms * count,
  };
}

/**
 * Packs accepted frames: a header of six 32-bit integers (version, atoms, numbers in `bonds`, frames, energies 0 or 1,
 * nothing), then the parts in the order of `AcceptedData`.
 *
 * @example unpackAccepted(packAccepted(data).buffer).numbers
 */
export function packAccepted(data: AcceptedData): Uint8Array<ArrayBuffer> {
  const { elements, isotopes, bonds, numbers, energies, positions } = data;
  const sizes = { atoms: elements.length, bonds: bonds.length, count: numbers.length };
  const at = layOut({ ...sizes, energies: energies !== null });
  if (at.end !== at.positions + positions.byteLength) {
    throw new RangeError(`${positions.length} coordinates are not ${sizes.count} frames.`);
  }
  const bytes = new Uint8Array(at.end);
  const { buffer } = bytes;
  new Int32Array(buffer).set([VERSION, sizes.atoms, sizes.bonds, sizes.count, energies ? 1 : 0, 0]);
  bytes.set(elements, at.elements);
  new Uint16Array(buffer, at.isotopes).set(isotopes);
  new Int32Array(buffer, at.bonds).set(bonds);
  new Int32Array(buffer, at.numbers).set(numbers);
  if (energies) {
    new Float64Array(buffer, at.values).set(energies.values);
    bytes.set(energies.present, at.present);
  }
  new Float64Array(buffer, at.positions).set(positions);
  return bytes;
}

/**
 * Reads what `packAccepted` wrote; the arrays are views of the bytes, not copies.
 *
 * @throws RangeError on bytes of another version or length
 */
export function unpackAccepted(buffer: ArrayBuffer): AcceptedData {
  if (buffer.byteLength < 4 * HEADER_NUMBERS)
    throw new RangeError(`${buffer.byteLength} bytes hold no frames.`);
  const [version, atoms = 0, bonds = 0, count = 0, energies] = new Int32Array(buffer, 0, HEADER_NUMBERS);
  if (version !== VERSION) throw new RangeError(`Frames of version ${version} cannot be read.`);
  const at = layOut({ atoms, bonds, count, energies: energies === 1 });
  if (buffer.byteLength !== at.end) {
    throw new RangeError(`${buffer.byteLength} bytes are not ${count} frames of ${atoms} atoms.`);
  }
  return {
    elements: new Uint8Array(buffer, at.elements, atoms),
    isotopes: new Uint16Array(buffer, at.isotopes, atoms),
    bonds: new Int32Array(buffer, at.bonds, bonds),
    numbers: new Int32Array(buffer, at.numbers, count),
    energies:
      energies === 1
        ? {
            values: new Float64Array(buffer, at.values, count),
            present: new Uint8Array(buffer, at.present, count),
          }
        : null,
    positions: new Float64Array(buffer, at.positions, 3 * atoms * count),
  };
}
