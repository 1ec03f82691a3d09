import { href } from "react-router";
import { KeyFigure, KeyFigures } from "~/components/ui/key-figures";
import type { Source } from "~/components/ui/provenance";
import { fixed, formatCount, formatEnergy, formatTemperature, withUnit } from "~/lib/format";
import type { DistinctPopulations } from "~/lib/thermo/populations";
import { thermalEnergyKcal } from "~/lib/units";
import { ENERGY_KIND_WORDS } from "~/lib/workbench/recipe-words";
import { useWorkbench } from "./workbench-context";

const METHOD = { to: `${href("/methods")}#populations`, label: "The method" };

/** Free energy, mean energy, entropy, heat capacity and effective number; each says where it comes from. */
export function ThermoFigures({ populations }: { populations: DistinctPopulations }) {
  const { rows, temperatureK, sift, level } = useWorkbench();
  const inputs = [
    { label: "conformers", value: `${formatCount(rows.length)}, each with its weight g` },
    { label: "weights g", value: populations.weights.kind },
    {
      label: "energies",
      value: `${level?.name ?? "unnamed level"}, ${ENERGY_KIND_WORDS[level?.energyKind ?? "electronic"]}, relative to the lowest`,
    },
    { label: "temperature", value: withUnit(formatTemperature(temperatureK), "K") },
    { label: "RT", value: withUnit(fixed(thermalEnergyKcal(temperatureK), 6), "kcal/mol") },
  ];
  const source = (
    name: string,
    value: string,
    unit: string,
    raw: number,
    formula: Source["formula"],
  ): Source => ({
    name,
    value,
    unit,
    raw,
    formula,
    inputs,
    recipe: sift ? `sift ${sift.id}` : undefined,
    method: METHOD,
  });
  const { freeEnergy, energy, entropy, heatCapacity, effectiveCount } = populations;
  return (
    <KeyFigures>
      <KeyFigure
        label="Conformational free energy"
        value={formatEnergy(freeEnergy)}
        unit="kcal/mol"
        source={source(
          "Conformational free energy",
          formatEnergy(freeEnergy),
          "kcal/mol, relative to the lowest conformer",
          freeEnergy,
          <>
            F = −RT ln Σ g<sub>i</sub> exp(−E<sub>i</sub>/RT)
          </>,
        )}
      />
      <KeyFigure
        label="Mean energy"
        value={formatEnergy(energy)}
        unit="kcal/mol"
        source={source(
          "Mean energy",
          formatEnergy(energy),
          "kcal/mol, relative to the lowest conformer",
          energy,
          <>
            U = Σ p<sub>i</sub> E<sub>i</sub>
          </>,
        )}
      />
      <KeyFigure
        label="Entropy"
        value={fixed(entropy, 2)}
        unit="cal/(mol K)"
        source={source(
          "Conformational entropy",
          fixed(entropy, 2),
          "cal/(mol K)",
          entropy,
          <>
            S = −R Σ p<sub>i</sub> ln(p<sub>i</sub>/g<sub>i</sub>)
          </>,
        )}
      />
      <KeyFigure
        label="Heat capacity"
        value={fixed(heatCapacity, 2)}
        unit="cal/(mol K)"
        source={source(
          "Conformational heat capacity",
          fixed(heatCapacity, 2),
          "cal/(mol K)",
          heatCapacity,
          <>
            C = Σ p<sub>i</sub> (E<sub>i</sub> − U)<sup>2</sup> / RT<sup>2</sup>
          </>,
        )}
      />
      <KeyFigure
        label="Effective number"
        value={fixed(effectiveCount, 1)}
        unit="microstates"
        source={source(
          "Effective number",
          fixed(effectiveCount, 1),
          "microstates that share the population",
          effectiveCount,
          <>
            N = exp(S/R) = exp(−Σ p<sub>i</sub> ln(p<sub>i</sub>/g<sub>i</sub>))
          </>,
        )}
      />
    </KeyFigures>
  );
}
