import { fixed } from "~/lib/format";
import type { MeasureHistogram } from "~/lib/measure/histogram";
import { MEASURE_UNIT, type MeasureKind } from "~/lib/measure/measure";
import type { ConformerRow } from "~/lib/workbench/conformers";
import { shareFigure } from "~/lib/workbench/findings";
import type { Choose } from "./plot";
import { PopulationDistribution } from "./population-distribution";

/** Every 60° that lies in the range. */
const TORSION_TICKS = [-180, -120, -60, 0, 60, 120, 180, 240, 300, 360];
const TITLES: Record<MeasureKind, string> = { distance: "Distance", angle: "Angle", torsion: "Torsion" };

/** How a measured quantity spreads over the ensemble, by population. */
export function MeasureDistribution({
  histogram,
  kind,
  name,
  rows,
  note,
  onChoose,
}: {
  histogram: MeasureHistogram;
  kind: MeasureKind;
  /** "C3–C4–N5–S6". */
  name: string;
  /** Row of each index in the histogram's parts. */
  rows: readonly ConformerRow[];
  note?: string;
  onChoose: Choose;
}) {
  const { bins } = histogram;
  const unit = MEASURE_UNIT[kind];
  const width = bins[0] ? bins[0].to - bins[0].from : 0;
  const per = `${fixed(width, kind === "distance" ? 2 : width < 1 ? 1 : 0)}${unit === "°" ? "°" : " Å"}`;
  return (
    <PopulationDistribution
      title={`${TITLES[kind]} ${name}`}
      fileName={`${kind}-distribution`}
      note={
        [steadyNote(histogram, kind), note, undefinedNote(histogram.undefinedShare)]
          .filter(Boolean)
          .join(" ") || undefined
      }
      label={`Distribution of ${name} by population`}
      height={260}
      bins={bins}
      unit={unit}
      digits={kind === "distance" ? 2 : 1}
      axis={`${kind}, ${unit}`}
      per={per}
      ticks={kind === "torsion" ? TORSION_TICKS : undefined}
      headroom={1.08}
      partOf={(index) => ({
        name: rows[index]?.name ?? "",
        frame: rows[index]?.frame,
        population: rows[index]?.population ?? 0,
      })}
      onChoose={onChoose}
    />
  );
}

/** One bar alone says nothing by its height: what it means is said in words. */
function steadyNote({ bins }: MeasureHistogram, kind: MeasureKind): string | null {
  const [only, ...more] = bins.filter(({ share }) => share > 0);
  if (only === undefined || more.length > 0) return null;
  const digits = kind === "distance" ? 2 : 1;
  const unit = kind === "distance" ? "\u00a0Å" : "°";
  return `Every conformer lies between ${fixed(only.from, digits)} and ${fixed(only.to, digits)}${unit}: this ${kind} does not vary beyond that over the ensemble.`;
}

function undefinedNote(share: number): string | null {
  return share > 0
    ? `Undefined in ${shareFigure(share)} of the ensemble: the atoms lie on one line there.`
    : null;
}
