/** Texts longer than this are not kept. */
const LONGEST = 64;

/**
 * A function of a short text that remembers its answers: comment lines use the same words in every frame. Emptied when
 * other words fill it, so that memory stays bounded.
 *
 * @example const unit = remember(parseEnergyUnit);
 */
export function remember<Result>(compute: (text: string) => Result): (text: string) => Result {
  const known = new Map<string, Result>();
  return (text) => {
    const found = known.get(text);
    if (found !== undefined || known.has(text)) return found as Result;
    const result = compute(text);
    if (text.length > LONGEST) return result;
    if (known.size >= 1024) known.clear();
    known.set(text, result);
    return result;
  };
}
