import { expect, it } from "vitest";
import { alkane, alkaneBonds } from "../../../tests/factories/geometry.ts";
import { pack } from "../../../tests/factories/yardstick.ts";
import { makeGraph } from "../structure.ts";
import { coinciding } from "./coincide.ts";

const graph = makeGraph(
  Uint8Array.from({ length: 17 }, (_, a) => (a < 5 ? 6 : 1)),
  alkaneBonds(5).flat(),
);
const shape = (...torsions: number[]) => pack(alkane(5, torsions) as number[][]);

it("names what lies where the first one does, turned and moved or not, and nothing else", () => {
  const turned = shape(60, 180).map((_, i, all) =>
    i % 3 === 0 ? -all[i + 1]! : i % 3 === 1 ? all[i - 1]! : all[i]! + 3,
  );
  const found = coinciding(graph, [
    { name: "c1", positions: shape(60, 180) },
    { name: "c2", positions: shape(60, 180) },
    { name: "c3", positions: shape(-60, 180) },
    { name: "c4", positions: turned },
    { name: "c5", positions: shape(62, 179) },
  ]);
  expect(found.map(({ name }) => name)).toEqual(["c2", "c4", "c5"]);
  expect(found[0]!.rmsd).toBeLessThan(1e-6);
  expect(coinciding(graph, [{ name: "c1", positions: shape(60, 180) }])).toEqual([]);
});
