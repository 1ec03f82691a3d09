import { withUnit } from "../format.ts";
import type { AtomSet } from "../structure.ts";

/**
 * That the energy of an outside structure takes no part, where its hydrogens are missing or differ; null where it may.
 *
 * @param structure.energy in the level's own unit; `from` as it was read, or "typed"
 * @example unusedEnergy({ atoms: "heavy", energy: { value: -35.5, from: "typed" } }, { name: "MMFF94", unit: "kcal/mol" })
 */
export function unusedEnergy(
  structure: { atoms: AtomSet; energy: { value: number; from: string } | null },
  level: { name: string; unit: string | null } | undefined,
): string | null {
  const { atoms, energy } = structure;
  if (energy === null || atoms === "all") return null;
  const value = String(energy.value).replaceAll("-", "−");
  const read = energy.from === "typed" ? "as typed" : "as its file has it";
  const number =
    level === undefined ? "" : ` at ${level.name}, ${withUnit(value, level.unit ?? "")} ${read},`;
  return `Its energy${number} was not used, and no strain is taken from it: hydrogens are missing or differ, so the number is not that of this molecule.`;
}
