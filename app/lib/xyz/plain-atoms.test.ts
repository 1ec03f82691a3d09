import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { LineBuffer } from "../text/lines.ts";
import { readAtomLine } from "./atom-line.ts";
import { PLAIN_LAYOUT } from "./layout.ts";
import { readPlainAtoms } from "./plain-atoms.ts";

function fast(text: string) {
  const lines = new LineBuffer("a.xyz");
  lines.append(new TextEncoder().encode(text));
  const target = {
    count: 1,
    read: 0,
    elements: new Uint8Array(1),
    makeRoom() {},
    positions: new Float64Array(3),
    extra: -1,
    token: null as string | null,
    name(_atom: number, token: string) {
      this.token = token;
    },
  };
  readPlainAtoms(lines, target);
  return { ...target, rest: lines.end - lines.at, line: lines.line };
}

const digits = (most: number) =>
  fc.string({ unit: fc.constantFrom(..."0123456789"), minLength: 1, maxLength: most });
const number = fc.oneof(
  {
    weight: 4,
    arbitrary: fc
      .tuple(fc.constantFrom("", "-", "+"), digits(4), digits(20))
      .map(([s, a, b]) => `${s}${a}.${b}`),
  },
  { weight: 2, arbitrary: fc.double({ noNaN: true, noDefaultInfinity: true }).map(String) },
  {
    weight: 1,
    arbitrary: fc.constantFrom(
      "1.",
      ".5",
      "-.25",
      "0",
      "-0.0",
      "1e-3",
      "12345678901234567890",
      "1,5",
      "nan",
      "5x",
    ),
  },
);

describe("the fast path reads what the slow path reads", () => {
  test("doubles, elements and further columns of any line", () => {
    const line = fc.tuple(
      fc.constantFrom("C", "c", "CL", "Cl", "H", "D", "C1", "6", "Qq", "CA", "X"),
      fc.tuple(number, number, number),
      fc.constantFrom(" ", "  ", "\t"),
      fc.constantFrom("", " 1.5", " a b"),
    );
    fc.assert(
      fc.property(line, ([symbol, axes, blank, tail]) => {
        const text = [symbol, ...axes].join(blank) + tail;
        const quick = fast(`${text}\n`);
        const positions = new Float64Array(3);
        const slow = readAtomLine(text, PLAIN_LAYOUT, positions, 0);
        // What the fast path takes, the slow one takes too, and to the last bit; the rest it leaves alone.
        if (quick.read === 0) {
          expect(quick.rest).toBe(text.length + 1);
          return;
        }
        expect(slow).toMatchObject({ kind: "atom", atom: { z: quick.elements[0] } });
        expect(quick.token).toBe(/^(?:C|c|CL|Cl|H)$/.test(symbol) ? null : symbol);
        expect([...quick.positions]).toEqual([...positions]);
        expect(slow.kind === "atom" && slow.atom.extra).toBe(quick.extra);
      }),
      { seed: 31, numRuns: 4000 },
    );
  });

  test("takes plain lines in all line ends and leaves unfinished ones", () => {
    expect(fast("C 1.25 -2.5 3\n")).toMatchObject({ read: 1, rest: 0, line: 1, extra: 0 });
    expect(fast("C 1.25 -2.5 3\r\nH")).toMatchObject({ read: 1, rest: 1 });
    expect(fast("C 1.25 -2.5 3\rH")).toMatchObject({ read: 1, rest: 1 });
    for (const text of ["C 1.25 -2.5 3", "C 1.25 -2.5 3\r", "C 1.25 -2.5", "C 1.2", "C", "", "C 1 2 3 4"]) {
      expect(fast(text)).toMatchObject({ read: 0, extra: -1 });
    }
  });
});
