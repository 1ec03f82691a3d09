import { expect, it } from "vitest";
import { coveredReference, packEnergies, pairLevels, unpackEnergies } from "./level-energies.ts";

const column = (values: (number | null)[]) => ({
  values: Float64Array.from(values, (v) => v ?? 0),
  present: Uint8Array.from(values, (v) => (v === null ? 0 : 1)),
});

it("travels as text without losing a bit", () => {
  const values = Array.from({ length: 20_000 }, (_, i) => (i % 7 === 0 ? null : Math.sqrt(i) / 3));
  const read = unpackEnergies(packEnergies("a", column(values)), values.length);
  expect(read).toEqual(column(values));
});

it("keeps those with both energies and counts who lacks which", () => {
  const members = [1, 2, 3, 4].map((frame) => ({ frame, name: `c${frame}`, weight: frame }));
  const paired = pairLevels(members, column([0, 1, null, null]), column([5, null, 6, null]));
  expect(paired.members.map((m) => m.frame)).toEqual([1]);
  expect([paired.level[0], paired.reference[0], paired.weights[0]]).toEqual([0, 5, 1]);
  expect(paired).toMatchObject({ missingLevel: 2, missingReference: 2 });
  expect(paired.left.map((m) => m.name)).toEqual(["c2", "c3", "c4"]);
});

it("says what of the reference the level has: Boltzmann's law by hand for 0 and 1 kcal/mol", () => {
  const members = [1, 2, 3].map((frame) => ({ frame, name: `c${frame}`, weight: 1 }));
  const reference = column([0, 1, null]);
  const upper = Math.exp(-1 / (1.987204258640832e-3 * 298.15));
  const without = coveredReference(members, column([null, 0, 0]), reference, 298.15);
  expect(without.covered).toBeCloseTo(upper / (1 + upper), 12);
  expect(without.lowest?.name).toBe("c1");
  expect(without.lowest?.share).toBeCloseTo(1 / (1 + upper), 12);
  const lacksSecond = coveredReference(members, column([0, null, 0]), reference, 298.15);
  expect(lacksSecond.lowest).toBeNull();
  expect(lacksSecond.covered).toBeCloseTo(1 / (1 + upper), 12);
  expect(coveredReference(members, column([0, 0, 0]), reference, 298.15)).toEqual({
    covered: 1,
    lowest: null,
  });
});
