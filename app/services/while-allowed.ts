/**
 * Pieces of a download for as long as whoever takes them still may: asked again before every piece but the first. Once
 * the answer is no the download breaks off, so that its taker cannot mistake it for the whole.
 *
 * @param ask throws when the right is gone, as the functions of `auth/access.server.ts` do
 * @example whileAllowed(chunks, () => accessEnsemble(actor, "read-source", ensembleId))
 */
export async function* whileAllowed<Piece>(
  pieces: AsyncIterable<Piece>,
  ask: () => Promise<unknown>,
): AsyncGenerator<Piece, void, undefined> {
  let first = true;
  for await (const piece of pieces) {
    if (!first) await ask();
    first = false;
    yield piece;
  }
}
