import { expect, it } from "vitest";
import { averageOf, momentsOf } from "./average.ts";
import { shownAveragesCsv } from "./shown-csv.ts";

it("every number of the table says its temperature, level and weights", () => {
  const moments = momentsOf(
    { rule: "linear", values: [1, 3] },
    { degeneracies: [1, 1], mirrorMerged: false },
  );
  const averages = [averageOf(moments, [1, 0]), averageOf(moments, [0.5, 0.5])];
  const text = shownAveragesCsv({
    temperatures: [200, 298.15],
    here: 1,
    level: "=M",
    weights: "copies",
    sigma: 0.5,
    draws: 2000,
    seed: 7,
    rows: [
      {
        property: { name: "d, long", unit: "Å" },
        rule: "linear",
        averages,
        average: averages[1]!,
        error: { sd: 0.25, low: 1, high: 3, resultantSd: null },
      },
    ],
  });
  expect(text).toBe(
    "property,unit,rule,average at 200 K,average at 298.15 K,spread at 298.15 K,uncertainty at 298.15 K," +
      "covered at 298.15 K,level,weights,sigma [kcal/mol],draws,seed\r\n" +
      '"d, long",Å,linear,1,2,1,0.25,1,\'=M,copies,0.5,2000,7\r\n',
  );
});
