import { WIDE_BYTES } from "../../lib/text/sniff.ts";

/** The first bytes of a file, enough to tell what it is, and all of them again. */
export interface ReadHead {
  head: Uint8Array;
  /** All bytes, the first ones too. */
  bytes: AsyncGenerator<Uint8Array, void, undefined>;
  /** For who takes none of the bytes: a generator that never began closes nothing. */
  close(): Promise<void>;
}

/**
 * Reads ahead as far as a file's format shows.
 *
 * @example const { head, bytes, close } = await readHead(source)
 */
export async function readHead(source: AsyncIterable<Uint8Array>): Promise<ReadHead> {
  const iterator = source[Symbol.asyncIterator]();
  const pieces: Uint8Array[] = [];
  let length = 0;
  while (length < WIDE_BYTES) {
    const next = await iterator.next();
    if (next.done) break;
    pieces.push(next.value);
    length += next.value.length;
  }
  const head = Buffer.concat(pieces);
  return {
    head,
    bytes: wholeOf(head, iterator),
    close: async () => {
      await iterator.return?.();
    },
  };
}

async function* wholeOf(
  head: Uint8Array,
  rest: AsyncIterator<Uint8Array>,
): AsyncGenerator<Uint8Array, void, undefined> {
  try {
    yield head;
    for (let next = await rest.next(); !next.done; next = await rest.next()) yield next.value;
  } finally {
    await rest.return?.();
  }
}
