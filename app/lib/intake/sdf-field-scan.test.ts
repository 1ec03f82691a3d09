import { readFileSync } from "node:fs";
import { expect, test } from "vitest";
import { fixtures } from "../../../tests/factories/reference.ts";
import { SdfReader } from "../sdf.server.ts";
import { decideEnergies } from "./decide-energies.ts";
import { EnergyScan } from "./energies.ts";
import { findUnit } from "./energy-unit-finding.ts";
import { settleEnergies } from "./settle-energies.ts";

const reader = new SdfReader({ file: "a.sdf" });
const frames = [...reader.push(readFileSync(`${fixtures}ensembles/tosylamide.sdf`)), ...reader.end()];
function scan(from: string | null, drop: string[] = []) {
  const s = new EnergyScan({ from });
  for (const f of frames) s.add(f, f.comment, new Map([...f.fields].filter(([k]) => !drop.includes(k))));
  return s.finish();
}
test("several, lone, given", () => {
  const several = scan(null);
  expect(several.verdict).toBe("several");
  expect(several.candidates.map((c) => [c.from, c.class])).toEqual([
    ["field:MMFF94_ENERGY_KCAL_MOL", "energy"],
    ["field:UFF_ENERGY_KCAL_MOL", "energy"],
    ["field:CONFORMER_NUMBER", "other"],
  ]);
  const lone = scan(null, ["UFF_ENERGY_KCAL_MOL"]);
  expect([lone.verdict, lone.chosen?.from, findUnit(lone.chosen!, frames[0]!.elements)]).toEqual([
    "lone",
    "field:MMFF94_ENERGY_KCAL_MOL",
    { unit: "kcal/mol", proposed: "kcal/mol", evidence: "bound" },
  ]);
  const given = scan("field:UFF_ENERGY_KCAL_MOL");
  expect([given.verdict, given.chosen?.key, given.chosen?.column.values[0], given.chosen?.count]).toEqual([
    "given",
    "UFF_ENERGY_KCAL_MOL",
    45.681949,
    400,
  ]);
  expect(() => scan("field:uff")).toThrow(/No frame has/);
  const answers = {
    energyUnit: null,
    energyFrom: "field:UFF_ENERGY_KCAL_MOL",
    level: "UFF",
    energyKind: "electronic",
    energyTemperature: null,
  } as const;
  const d = decideEnergies(given, frames[0]!.elements, answers, {
    refuseOpen: true,
    confirmUnit: false,
    knownLevels: [],
    comment: "",
  });
  expect(d.kind).toBe("column");
  if (d.kind === "ask") return;
  const settled = settleEnergies(d, {
    findings: given,
    answers,
    kindStated: true,
    extended: true,
    frames: 400,
    accepted: () => true,
  });
  expect(settled.columns.map((c) => [c.name, c.kind, c.unit, c.origin, c.count])).toEqual([
    ["UFF", "energy", "kcal/mol", "field:UFF_ENERGY_KCAL_MOL", 400],
    ["CONFORMER_NUMBER", "property", null, "field:CONFORMER_NUMBER", 400],
    ["MMFF94_ENERGY_KCAL_MOL", "property", "kcal/mol", "field:MMFF94_ENERGY_KCAL_MOL", 400],
  ]);
});
