import { useMemo } from "react";
import { useOutletContext } from "react-router";
import { useWorkbench } from "~/components/workbench/workbench-context";
import type { ColumnData } from "~/lib/column-data";
import { compareLevels, type LevelComparison } from "~/lib/levels/compare";
import {
  type CoveredReference,
  coveredReference,
  type LevelEnergiesView,
  type Member,
  type PairedLevels,
  pairLevels,
  unpackEnergies,
} from "~/lib/levels/level-energies";
import { type LowestMeeting, meetLowest } from "~/lib/levels/ranking";
import { narrowestWindow, type WindowReading, type WindowStep, windowCurve } from "~/lib/levels/window";
import { chooseWeights } from "~/lib/thermo/populations";
import type { IntakeView, LevelView } from "~/lib/views";
import { conformerName } from "~/lib/workbench/conformers";

export interface LevelData extends LevelView {
  energies: ColumnData;
}

/** The levels of the ensemble with their energies, unpacked once. */
export function useLevelData(views: readonly LevelEnergiesView[]): LevelData[] {
  const { ensemble } = useWorkbench();
  return useMemo(
    () =>
      ensemble.levels.flatMap((level) => {
        const view = views.find((one) => one.id === level.id);
        return view ? [{ ...level, energies: unpackEnergies(view, ensemble.frames) }] : [];
      }),
    [views, ensemble.levels, ensemble.frames],
  );
}

export interface Members {
  members: readonly Member[];
  /** What is compared: the sift's conformers, or all accepted frames. */
  among: "conformers" | "accepted";
  /** What each counts by, in a word, and why. */
  weights: "copies" | "degeneracy" | "each once";
  weightsReason: string;
}

/** Who is compared: the conformers of the sift where there is one and they are wanted, else the accepted frames. */
export function useMembers(reference: LevelView | null): Members {
  const { result, state } = useWorkbench();
  const intake = useOutletContext<IntakeView>();
  return useMemo(() => {
    if (result !== null && state.compare.among === "conformers") {
      const weights = chooseWeights(result.kept, reference?.energyKind ?? "electronic", state.weights);
      return {
        among: "conformers",
        weights: weights.kind,
        weightsReason: weights.reason,
        members: result.kept.map((conformer, k) => ({
          frame: conformer.frame,
          name: conformerName(k),
          weight: weights.values[k] ?? 1,
        })),
      };
    }
    const members: Member[] = [];
    for (let k = 0; k < intake.strip.length; k++) {
      const mark = intake.strip[k];
      if (mark === "a" || mark === "r") members.push({ frame: k + 1, name: `frame ${k + 1}`, weight: 1 });
    }
    return {
      among: "accepted",
      weights: "each once",
      members,
      weightsReason:
        "Every accepted frame counts once: duplicates are not sifted out and weigh as often as found.",
    };
  }, [result, state.compare.among, state.weights, reference?.energyKind, intake.strip]);
}

export interface Comparison {
  level: LevelData;
  reference: LevelData;
  paired: PairedLevels;
  comparison: LevelComparison;
  meeting: LowestMeeting;
  steps: WindowStep[];
  /** For the share to keep that is set. */
  window: WindowReading;
  /** What of the reference has an energy at the level. */
  covered: CoveredReference;
  /** Frame of a zero at one conformer; null otherwise. */
  zeroPlace: number | null;
}

/** The comparison that the address asks for; null where no conformer has both energies. */
export function useComparison(
  level: LevelData | null,
  reference: LevelData | null,
  members: readonly Member[],
): Comparison | null {
  const { state, temperatureK } = useWorkbench();
  const { zero, zeroFrame, share } = state.compare;
  const paired = useMemo(
    () => (level && reference ? pairLevels(members, level.energies, reference.energies) : null),
    [level, reference, members],
  );
  return useMemo(() => {
    if (!level || !reference || !paired || paired.members.length === 0) return null;
    const named = paired.members.findIndex(({ frame }) => frame === zeroFrame);
    const comparison = compareLevels({
      level: paired.level,
      reference: paired.reference,
      weights: paired.weights,
      temperatureK,
      align: zero,
      commonPlace: zero === "common" && named >= 0 ? named : undefined,
    });
    const meeting = meetLowest(paired.level, paired.reference);
    const steps = windowCurve(paired.level, comparison.referencePopulations);
    return {
      level,
      reference,
      paired,
      comparison,
      meeting,
      steps,
      window: narrowestWindow(steps, share),
      covered: coveredReference(members, level.energies, reference.energies, temperatureK),
      zeroPlace: zero === "common" ? (named >= 0 ? named : meeting.referenceLowest) : null,
    };
  }, [level, reference, members, paired, temperatureK, zero, zeroFrame, share]);
}
