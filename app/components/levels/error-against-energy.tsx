import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, type Choose, Plot, usePlot } from "~/components/charts/plot";
import { formatEnergy, plural } from "~/lib/format";
import { PairLayer } from "./pair-layer";
import { drawnPoints, energyTop, type PairPoint, pointWords } from "./pair-points";
import type { Comparison } from "./use-comparison";

/** Deviation of the level against the energy at the reference: are the high ones worse, and to which side? */
export function ErrorAgainstEnergy({
  found,
  points,
  selected,
  onChoose,
}: {
  found: Comparison;
  points: readonly PairPoint[];
  selected: ReadonlySet<number>;
  onChoose: Choose;
}) {
  const { level, reference, comparison } = found;
  const top = energyTop(
    points.map((p) => p.reference),
    0,
  );
  const inside = points.filter((p) => p.reference <= top);
  const drawn = drawnPoints(inside);
  const most = 1.12 * Math.max(0.1, comparison.rmsd, ...drawn.map((p) => Math.abs(p.deviation)));
  const left = points.length - drawn.length;
  const farthest = [...drawn].sort((a, b) => Math.abs(b.deviation) - Math.abs(a.deviation)).slice(0, 4);
  return (
    <ChartFrame
      title="Error against energy"
      fileName="error-against-energy"
      note={left > 0 ? `${plural(left, "conformer")} not drawn; all stand in the table.` : undefined}
      data={{
        columns: [
          { name: "conformer" },
          { name: "frame", digits: 0 },
          { name: `${reference.name} (reference)`, unit: "kcal/mol", digits: 2 },
          { name: "deviation", unit: "kcal/mol", digits: 2 },
        ],
        rows: points.map((p) => [p.name, p.frame, p.reference, p.deviation]),
      }}
    >
      <Plot
        label={`Deviation of ${plural(drawn.length, "conformer")} against the energy at ${reference.name}`}
        x={{
          title: `${reference.name}, kcal/mol`,
          low: -0.045 * top,
          high: top,
          ordinal: reference.ordinal,
        }}
        y={{
          title: `${level.name} less ${reference.name}, kcal/mol`,
          low: -most,
          high: most,
          ordinal: level.ordinal,
        }}
        points={[...drawn]
          .sort((a, b) => a.reference - b.reference)
          .map((p) => ({
            x: p.reference,
            y: p.deviation,
            frame: p.frame,
            label: pointWords(p, level.name, reference.name),
          }))}
        onChoose={onChoose}
      >
        <ZeroLayer rmsd={comparison.rmsd} />
        <PairLayer
          points={drawn}
          x={(p) => p.reference}
          y={(p) => p.deviation}
          selected={selected}
          keepClear={[{ y: comparison.rmsd, text: rmsdWords(comparison.rmsd) }]}
          named={farthest.map((point) => ({ point, text: point.name }))}
        />
      </Plot>
    </ChartFrame>
  );
}

const rmsdWords = (rmsd: number) => `RMSD ${formatEnergy(rmsd)}`;

function ZeroLayer({ rmsd }: { rmsd: number }) {
  const plot = usePlot();
  if (!plot) return null;
  const rule = (y: number, dash?: string) => (
    <path d={`M${plot.left} ${plot.y(y)}H${plot.right}`} stroke="var(--color-ink-3)" strokeDasharray={dash} />
  );
  return (
    <g>
      {rule(0)}
      {rule(rmsd, "2 3")}
      {rule(-rmsd, "2 3")}
      <ChartText x={plot.right - 4} y={plot.y(rmsd) - 5} end halo>
        {rmsdWords(rmsd)}
      </ChartText>
    </g>
  );
}
