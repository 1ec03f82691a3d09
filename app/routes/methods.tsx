import { AppShell } from "~/components/layout/app-shell";
import { ReferencePage } from "~/components/layout/reference-page";
import { type MethodNumbers, methodSections } from "~/components/reference/method-sections";
import { SYMMETRY_REACH, SYMMETRY_TOLERANCE } from "~/lib/align/symmetry-number";
import { BOND_FACTOR, CONTESTED_FACTOR, TOO_CLOSE } from "~/lib/chem/bonds";
import { FLAT } from "~/lib/chem/stereo";
import { DEFAULT_ENERGY_TOLERANCE_KCAL, DEFAULT_RMSD_TOLERANCE } from "~/lib/recipe/recipe";
import { ENERGY_UNITS, GAS_CONSTANT_J, kcalPer, kjPer, thermalEnergyKcal } from "~/lib/units";
import type { Route } from "./+types/methods";

export const meta: Route.MetaFunction = () => [
  { title: "Methods and sources · Lowlying" },
  { name: "description", content: "Every formula in use, with its source, and the constants." },
];

/** The figures of the page come from the code that computes with them. */
export function loader(): MethodNumbers {
  return {
    gasConstant: GAS_CONSTANT_J,
    thermal: thermalEnergyKcal(298.15),
    units: ENERGY_UNITS.map((unit) => ({ unit, kcal: kcalPer(unit), kj: kjPer(unit) })),
    bondFactor: BOND_FACTOR,
    contestedFactor: CONTESTED_FACTOR,
    tooClose: TOO_CLOSE,
    flat: FLAT,
    symmetryTolerance: SYMMETRY_TOLERANCE,
    symmetryReach: SYMMETRY_REACH,
    energyTolerance: DEFAULT_ENERGY_TOLERANCE_KCAL,
    rmsdTolerance: DEFAULT_RMSD_TOLERANCE,
  };
}

export default function Page({ loaderData }: Route.ComponentProps) {
  return (
    <AppShell>
      <ReferencePage
        title="Methods and sources"
        lead="What is computed, by which formula, with which constants, and from which source. What stands here is in use; nothing else is computed."
        sections={methodSections(loaderData)}
      />
    </AppShell>
  );
}
