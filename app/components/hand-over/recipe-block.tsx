import { Facts } from "~/components/ui/facts";
import { BlockHead } from "~/components/ui/finding";
import { useWorkbench } from "~/components/workbench/workbench-context";
import {
  fixed,
  formatBytes,
  formatCount,
  formatDateTime,
  formatEnergy,
  formatSeconds,
  formatTemperature,
  plural,
  withUnit,
} from "~/lib/format";
import type { SiftRecipe } from "~/lib/recipe/recipe";
import { CONSTANTS_YEAR } from "~/lib/units";
import { ATOM_SET_WORDS } from "~/lib/workbench/recipe-words";

/** Every parameter of the distinct set shown. */
export function RecipeBlock({ recipe }: { recipe: SiftRecipe }) {
  const { sift, result, level, temperatureK, populations } = useWorkbench();
  if (sift === null || result === null) return null;
  const facts = [
    { label: "Level", value: recipe.levelName ?? "none, file order" },
    level ? { label: "Unit in the files", value: level.unit } : null,
    {
      label: "Energy tolerance",
      value:
        recipe.energyTolerance === null ? "none" : withUnit(formatEnergy(recipe.energyTolerance), "kcal/mol"),
    },
    { label: "RMSD tolerance", value: withUnit(fixed(recipe.rmsdTolerance, 3), "Å") },
    {
      label: "Window",
      value: recipe.window === null ? "none" : withUnit(formatEnergy(recipe.window), "kcal/mol"),
    },
    { label: "Atoms compared", value: ATOM_SET_WORDS[recipe.atoms] },
    { label: "Symmetry", value: recipe.symmetry ? "all exchanges of equivalent atoms" : "off" },
    {
      label: "Mirror images",
      value: recipe.mirror === "merge" ? "merged, counted by degeneracy" : "kept apart",
    },
    { label: "Chirality", value: `${recipe.chirality}${recipe.chiralityOverridden ? ", by choice" : ""}` },
    populations
      ? {
          label: "Populations",
          value: `${withUnit(formatTemperature(temperatureK), "K")}, weighted by ${populations.weights.kind}`,
        }
      : null,
    {
      label: "Computed",
      value: `${formatDateTime(sift.createdAt)}, in ${formatSeconds(result.seconds)}, ${plural(result.pairsExamined, "pair")} compared`,
    },
    { label: "Constants", value: CONSTANTS_YEAR },
  ].filter((fact) => fact !== null);
  return (
    <section className="mt-9">
      <BlockHead title="Recipe" />
      <Facts facts={facts} ruled />
    </section>
  );
}

/** The original files with their checksums. */
export function SourcesBlock() {
  const { ensemble } = useWorkbench();
  return (
    <section className="mt-9">
      <BlockHead title={`Source ${ensemble.files.length === 1 ? "file" : "files"}`} />
      <ul className="border-t border-rule">
        {ensemble.files.map((file) => (
          <li
            key={file.position}
            className="figures flex flex-wrap items-baseline gap-x-6 gap-y-1 border-b border-rule py-2"
          >
            <span className="font-medium break-all">{file.name}</span>
            <span className="text-ink-2">
              {formatBytes(file.bytes)}, {formatCount(file.frames)} frames
            </span>
            <span className="text-xs break-all text-ink-3">SHA-256 {file.sha256}</span>
          </li>
        ))}
      </ul>
    </section>
  );
}
