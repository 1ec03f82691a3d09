/** The same numbers on every machine: Park and Miller, Commun. ACM 1988, 31, 1192. */
export function randomFrom(seed: number): () => number {
  let state = (seed % 2_147_483_646) + 1;
  return () => {
    state = (state * 48_271) % 2_147_483_647;
    return state / 2_147_483_647;
  };
}

/** What breaks readers: ends of lines, quotes, signs, numbers at the edges, markup, names that objects have by themselves. */
const PIECES = [
  ..."\0\n\r\t\"'`=,;:|<>()[]{}$%&*+-./\\ ",
  ...["\r\n", "\n\n\n", "$$$$\n", "M  END\n", "V3000", "M  V30 BEGIN ATOM\n", "> <E>\n"],
  ...["nan", "inf", "-inf", "1e999", "-0", "1e-999", "0x10", "1,5", "1d3", "99999999999999999999", "-1"],
  ...["999999", "1000001", "0", "Lattice=", 'Properties=species:S:1:pos:R:3"', "energy=", "pbc="],
  ...["__proto__", "constructor", "toString", "<script>alert(1)</script>", "javascript:alert(1)"],
  ...["\u202e", "\u2028", "\ufeff", "\ud800", "é", "\u{1f600}", "\x1b[31m", "{{7*7}}", "$" + "{7*7}", "=1+1"],
];

/** One file with a few wounds: bytes changed, pieces put in, taken out, doubled, exchanged, or cut off. */
export function mutate(source: Uint8Array, random: () => number): Uint8Array {
  let bytes = Buffer.from(source);
  const below = (n: number) => Math.floor(random() * n);
  const wounds = 1 + below(6);
  for (let k = 0; k < wounds && bytes.length > 0; k++) {
    const at = below(bytes.length);
    const to = Math.min(bytes.length, at + 1 + below(1 + below(200)));
    const piece = Buffer.from(PIECES[below(PIECES.length)] ?? "");
    switch (below(7)) {
      case 0:
        bytes[at] = below(256);
        break;
      case 1:
        bytes = Buffer.concat([bytes.subarray(0, at), piece, bytes.subarray(at)]);
        break;
      case 2:
        bytes = Buffer.concat([bytes.subarray(0, at), bytes.subarray(to)]);
        break;
      case 3:
        bytes = Buffer.concat([bytes.subarray(0, to), bytes.subarray(at)]);
        break;
      case 4:
        bytes = Buffer.concat([bytes.subarray(0, at), piece, bytes.subarray(to)]);
        break;
      case 5:
        bytes = bytes.subarray(0, at);
        break;
      default:
        bytes = Buffer.concat([bytes.subarray(at, to), bytes.subarray(0, at), bytes.subarray(to)]);
    }
  }
  return bytes;
}
