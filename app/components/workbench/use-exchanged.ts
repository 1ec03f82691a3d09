import { useMemo } from "react";
import { useCoordinates } from "~/hooks/use-coordinates";
import type { DroppedFrame } from "~/lib/recipe/result";
import { makeGraph } from "~/lib/structure";
import { ExchangedAtoms } from "~/lib/workbench/exchanged-atoms";
import { useWorkbench } from "./workbench-context";

/**
 * Which equivalent atoms the sift exchanged to lay repeats on the conformer that they repeat, in words by frame; frames
 * whose coordinates are on their way are absent. Null where nothing can be exchanged.
 */
export function useExchanged(
  kept: number,
  repeats: readonly DroppedFrame[],
): ReadonlyMap<number, readonly string[]> | null {
  const { ensemble, sift } = useWorkbench();
  const recipe = sift?.recipe ?? null;
  const exchanges = useMemo(() => {
    if (recipe === null) return null;
    const { atoms, symmetry, mirror } = recipe;
    const graph = makeGraph(Uint8Array.from(ensemble.elements), ensemble.bonds);
    const made = new ExchangedAtoms(graph, { atoms, symmetry, mirror: mirror === "merge" });
    return made.possible ? made : null;
  }, [recipe, ensemble]);
  const frames = exchanges ? [kept, ...repeats.map((repeat) => repeat.frame)] : [];
  const { positions } = useCoordinates(ensemble.id, ensemble.atoms, frames);
  return useMemo(() => {
    if (exchanges === null) return null;
    const first = positions.get(kept);
    const words = new Map<number, readonly string[]>();
    for (const { frame } of first ? repeats : []) {
      const second = positions.get(frame);
      if (first && second) words.set(frame, exchanges.between(first, second));
    }
    return words;
  }, [exchanges, positions, kept, repeats]);
}
