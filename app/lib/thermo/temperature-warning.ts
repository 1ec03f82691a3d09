import type { EnergyKind } from "../views.ts";

/** Two temperatures written with different digits are the same within this many K. */
const SAME_K = 0.005;

const KIND_WORDS: Partial<Record<EnergyKind, string>> = { free: "free energies", enthalpy: "enthalpies" };

const inKelvin = (temperature: number) => `${Number(temperature.toFixed(2))} K`;

function oneOf(temperatures: readonly number[], joint = "or"): string {
  const words = temperatures.map(inKelvin);
  const last = words.pop() ?? "";
  return words.length === 0 ? last : `${words.join(", ")} ${joint} ${last}`;
}

/**
 * What stands against populations at a temperature: free energies belong to one, and at another their entropy is not
 * the right one (row E13; methods page, section 7). Null where nothing does.
 *
 * @param level `temperature` in K, null where none was stated
 * @param temperaturesK all at which populations are shown
 * @example temperatureWarning({ name: "M", energyKind: "free", temperature: 298.15 }, 310)
 * // "The free energies of “M” belong to 298.15 K, and these populations are taken at 310 K: ..."
 */
export function temperatureWarning(
  level: { readonly name: string; readonly energyKind: EnergyKind; readonly temperature: number | null },
  ...temperaturesK: readonly number[]
): string | null {
  const { name, energyKind, temperature } = level;
  const kind = KIND_WORDS[energyKind];
  if (kind === undefined) return null;
  if (temperature === null) {
    if (energyKind !== "free") return null;
    return `The temperature of the ${kind} of “${name}” is not stated: populations are right at that temperature only, and nobody can tell whether it is ${oneOf(temperaturesK)}.`;
  }
  const others = temperaturesK.filter((one) => Math.abs(temperature - one) > SAME_K);
  if (others.length === 0) return null;
  const taken = oneOf(others, "and");
  return `The ${kind} of “${name}” belong to ${inKelvin(temperature)}, and these populations are taken at ${taken}: the thermal part of each conformer is not the right one there. Take the populations at ${inKelvin(temperature)}, or bring ${kind} for ${taken}.`;
}
