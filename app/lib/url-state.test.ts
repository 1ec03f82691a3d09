import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  changeState,
  defaultState,
  MAX_SELECTED,
  readState,
  searchOf,
  type WorkbenchState,
  writeState,
} from "./url-state.ts";

const SEED = 20261201;

describe("reading", () => {
  test("an empty address is the default state", () => {
    expect(readState(new URLSearchParams())).toEqual(defaultState());
  });

  test("every name of the address is read", () => {
    const params = new URLSearchParams(
      "v=1&sift=abcdefghij234567&T=310.5&w=2.5&sel=11,235,105&at=3,4,5,6&al=1,2,3&h=all&m=side&weights=degeneracy&sort=rmsd.down" +
        "&level=abcdefghij234567&ref=bbcdefghij234567&zero=common&zf=12&of=accepted&keep=99&err=0.5",
    );
    expect(readState(params)).toEqual({
      sift: "abcdefghij234567",
      temperatureK: 310.5,
      windowKcal: 2.5,
      selected: [11, 235, 105],
      pair: false,
      atoms: [2, 3, 4, 5],
      align: [0, 1, 2],
      hydrogens: "all",
      mode: "side",
      weights: "degeneracy",
      sort: { column: "rmsd", descending: true },
      compare: {
        level: "abcdefghij234567",
        reference: "bbcdefghij234567",
        zero: "common",
        zeroFrame: 12,
        among: "accepted",
        share: 0.99,
        sigmaKcal: 0.5,
      },
    } satisfies WorkbenchState);
  });

  test("two laid over each other are a pair, as long as nothing else is selected", () => {
    const pair = readState(new URLSearchParams("v=1&sel=105,3&pair=1"));
    expect(pair).toMatchObject({ selected: [105, 3], pair: true });
    expect(searchOf(writeState(pair))).toBe("?v=1&sel=105,3&pair=1");
    expect(searchOf(writeState(changeState(pair, { temperatureK: 310 })))).toContain("pair=1");
    expect(searchOf(writeState(changeState(pair, { selected: [105, 4] })))).toBe("?v=1&sel=105,4");
    expect(changeState(pair, { selected: [7, 8], pair: true })).toMatchObject({
      selected: [7, 8],
      pair: true,
    });
    for (const other of ["sel=105,3", "sel=105&pair=1", "sel=1,2,3&pair=1", "pair=1", "sel=1,2&pair=yes"]) {
      expect(readState(new URLSearchParams(other)).pair, other).toBe(false);
    }
  });

  test("an emptied selection is not the same as none made", () => {
    expect(readState(new URLSearchParams("sel=")).selected).toEqual([]);
    expect(readState(new URLSearchParams("")).selected).toBeNull();
  });

  test("no window is written as a word", () => {
    expect(readState(new URLSearchParams("w=none")).windowKcal).toBeNull();
  });

  test.each([
    "T=-5",
    "T=0",
    "T=1e9",
    "T=298,15",
    "T=NaN",
    "w=-1",
    "w=",
    "sift=../../etc",
    "sift=ABCDEFGHIJ234567",
    "at=0",
    "at=x",
    "al=1,2",
    "h=some",
    "m=",
    "weights=9",
    "sort=up",
    "sort=<b>.up",
    "v=77",
    "level=%20",
    "zero=none",
    "zf=0",
    "of=all",
    "keep=101",
    "keep=0",
    "err=-1",
  ])("nonsense is taken as absent: %s", (query) => {
    expect(readState(new URLSearchParams(query))).toEqual(defaultState());
  });

  test("level and reference may be said by name, as in a link written by hand", () => {
    const { compare } = readState(new URLSearchParams("level=MMFF94&ref=B3LYP%2F6-31G(d)"));
    expect([compare.level, compare.reference]).toEqual(["MMFF94", "B3LYP/6-31G(d)"]);
  });

  test("doubles and rubbish among frames are passed over, and the list has an end", () => {
    expect(readState(new URLSearchParams("sel=5,5,x,-1,0,007,12")).selected).toEqual([5, 12]);
    const long = Array.from({ length: 500 }, (_, i) => i + 1).join(",");
    expect(readState(new URLSearchParams(`sel=${long}`)).selected).toHaveLength(MAX_SELECTED);
    expect(readState(new URLSearchParams("at=1,2,3,4,5")).atoms).toEqual([0, 1, 2, 3]);
  });

  test("any text whatever gives a state that writes and reads back", () => {
    fc.assert(
      fc.property(
        fc.dictionary(fc.constantFrom("T", "w", "sel", "pair", "at", "h", "m", "sort", "sift"), fc.string()),
        (d) => {
          const state = readState(new URLSearchParams(d));
          expect(readState(writeState(state))).toEqual(state);
        },
      ),
      { seed: SEED, numRuns: 500 },
    );
  });
});

describe("writing", () => {
  test("defaults leave the address clean, and others keep their parameters", () => {
    expect(searchOf(writeState(defaultState()))).toBe("");
    expect(searchOf(writeState(defaultState(), new URLSearchParams("T=310&from=mail")))).toBe("?from=mail");
  });

  test("commas stay readable", () => {
    expect(searchOf(writeState({ ...defaultState(), selected: [11, 235] }))).toBe("?v=1&sel=11,235");
  });

  test("what is written is read back", () => {
    const any = fc.record({
      sift: fc.option(fc.stringMatching(/^[a-z2-7]{16}$/)),
      temperatureK: fc.integer({ min: 10000, max: 100000 }).map((centi) => centi / 100),
      windowKcal: fc.option(fc.integer({ min: 1, max: 100000 }).map((centi) => centi / 100)),
      selected: fc.option(fc.uniqueArray(fc.integer({ min: 1, max: 50000 }), { maxLength: MAX_SELECTED })),
      pair: fc.boolean(),
      atoms: fc.uniqueArray(fc.integer({ min: 0, max: 999 }), { maxLength: 4 }),
      align: fc.option(fc.uniqueArray(fc.integer({ min: 0, max: 999 }), { minLength: 3, maxLength: 12 })),
      hydrogens: fc.constantFrom("none", "polar", "all"),
      mode: fc.constantFrom("overlay", "side", "one"),
      weights: fc.constantFrom("auto", "copies", "degeneracy"),
      sort: fc.option(
        fc.record({ column: fc.constantFrom("energy", "population", "rmsd"), descending: fc.boolean() }),
      ),
      compare: fc.record({
        level: fc.option(fc.stringMatching(/^[a-z2-7]{16}$/)),
        reference: fc.option(fc.stringMatching(/^[a-z2-7]{16}$/)),
        zero: fc.constantFrom("least-squares", "own-minimum", "common", "median"),
        zeroFrame: fc.option(fc.integer({ min: 1, max: 50000 })),
        among: fc.constantFrom("conformers", "accepted"),
        share: fc.integer({ min: 1, max: 1000 }).map((permille) => permille / 1000),
        sigmaKcal: fc.integer({ min: 0, max: 2000 }).map((centi) => centi / 100),
      }),
    });
    const state = any.map((s) => ({ ...s, pair: s.pair && s.selected?.length === 2 }));
    fc.assert(
      fc.property(state, (s) => {
        expect(readState(new URLSearchParams(searchOf(writeState(s as WorkbenchState))))).toEqual(s);
      }),
      { seed: SEED, numRuns: 500 },
    );
  });
});
