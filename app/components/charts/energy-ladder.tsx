import { depthColour } from "~/components/ui/depth-strip";
import { fixed, formatEnergy, formatPopulation, plural, withUnit } from "~/lib/format";
import { thermalEnergyKcal } from "~/lib/units";
import type { ConformerRow, Outside } from "~/lib/workbench/conformers";
import { shareFigure, thermalLabel } from "~/lib/workbench/findings";
import { type Ladder, mergeLabels, type PlacedLabel } from "~/lib/workbench/ladder";
import { ChartFrame } from "./chart-frame";
import { foundByColumn, foundInNote, type Lit, litNote, PALE } from "./lit";
import { ChartText, type Choose, Plot, usePlot } from "./plot";

const BAR = 6;
const NAMED = 6;
/** Width of a letter at 12 px, near enough to see whether a label fits. */
const LETTER_PX = 6.6;

/** Relative energy against population: a rung a conformer, as long as its population, the lowest at the bottom. */
export function EnergyLadder({
  rows,
  ladder,
  outside,
  windowKcal,
  temperatureK,
  selected,
  lit = null,
  onChoose,
}: {
  rows: readonly ConformerRow[];
  ladder: Ladder;
  outside: Outside;
  windowKcal: number | null;
  temperatureK: number;
  selected: ReadonlySet<number>;
  lit?: Lit | null;
  onChoose: Choose;
}) {
  const widest = 100 * ladder.widest * 1.12;
  const foundBy = foundByColumn(rows);
  const notes = [
    litNote(lit),
    ladder.above.count > 0
      ? `${plural(ladder.above.count, "conformer")} above ${withUnit(formatEnergy(ladder.top), "kcal/mol")} not drawn, ${shareFigure(ladder.above.share)}.`
      : null,
    ladder.covered > 0
      ? `${plural(ladder.covered, "rung")} lie behind a more populated one of the same height.`
      : null,
  ].filter((note) => note !== null);
  return (
    <ChartFrame
      title="Energy ladder"
      fileName="energy-ladder"
      // They are about the drawing: the table that stands in for it without script holds every conformer.
      note={notes.length > 0 ? <span className="noscript:hidden">{notes.join(" ")}</span> : undefined}
      data={{
        columns: [
          { name: "conformer" },
          { name: "frame", digits: 0 },
          { name: "relative energy", unit: "kcal/mol", digits: 2 },
          { name: "population", unit: "%", digits: 1 },
          { name: "weight", digits: 2 },
          ...foundBy.head,
        ],
        rows: rows.map((row) => [
          row.name,
          row.frame,
          row.relativeEnergy,
          row.population === null ? null : 100 * row.population,
          row.weight,
          ...foundBy.cell(row),
        ]),
      }}
    >
      <Plot
        label={`Energy ladder: relative energy against population of ${plural(rows.length, "conformer")}`}
        x={{ title: "population, %", low: 0, high: widest }}
        y={{ title: "relative energy, kcal/mol", low: -0.035 * ladder.top, high: ladder.top }}
        points={ladder.rungs.map((rung) => ({
          x: 100 * rung.population,
          y: rung.energy,
          frame: rung.frame,
          label: `${rung.name}, frame ${rung.frame}: ${withUnit(formatEnergy(rung.energy), "kcal/mol")}, ${withUnit(formatPopulation(rung.population), "%")}${foundInNote(rows[rung.index] ?? {})}`,
        }))}
        onChoose={onChoose}
      >
        <LadderLayer
          ladder={ladder}
          outside={outside}
          windowKcal={windowKcal}
          temperatureK={temperatureK}
          selected={selected}
          lit={lit}
        />
      </Plot>
    </ChartFrame>
  );
}

function LadderLayer({
  ladder,
  outside,
  windowKcal,
  temperatureK,
  selected,
  lit,
}: {
  ladder: Ladder;
  outside: Outside;
  windowKcal: number | null;
  temperatureK: number;
  selected: ReadonlySet<number>;
  lit: Lit | null;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const shownWindow = windowKcal !== null && windowKcal < ladder.top ? windowKcal : null;
  const rt = thermalEnergyKcal(temperatureK);
  const marks = [...ladder.rungs]
    .sort((a, b) => b.population - a.population)
    .slice(0, NAMED)
    .map((rung) => ({ name: rung.name, x: plot.x(100 * rung.population), y: plot.y(rung.energy) }));
  const labels = mergeLabels(marks);
  return (
    <g>
      {shownWindow !== null ? <WindowBand plot={plot} windowKcal={shownWindow} outside={outside} /> : null}
      {rt < ladder.top ? (
        <>
          <path
            d={`M${plot.left} ${plot.y(rt)}H${plot.right}`}
            stroke="var(--color-rule-2)"
            strokeDasharray="1 3"
            strokeLinecap="round"
          />
          <ChartText x={plot.right} y={plot.y(rt) - 5} end halo>
            {thermalLabel(temperatureK)}
          </ChartText>
        </>
      ) : null}
      {ladder.rungs.map((rung) => (
        <Bar
          key={rung.index}
          x={plot.left}
          y={plot.y(rung.energy)}
          width={plot.x(100 * rung.population) - plot.left}
          population={rung.population}
          selected={selected.has(rung.frame)}
          pale={lit !== null && !lit.rows.has(rung.index)}
        />
      ))}
      <path
        d={ladder.curve.points
          .map(
            ({ energy, population }, k) =>
              `${k === 0 ? "M" : "L"}${plot.x(100 * population).toFixed(1)} ${plot.y(energy).toFixed(1)}`,
          )
          .join("")}
        fill="none"
        stroke="var(--color-ink-3)"
        strokeWidth={1}
      />
      <CurveLabel ladder={ladder} taken={labels} rt={rt < ladder.top ? plot.y(rt) : null} />
      {labels.map((label) => (
        <RungLabel key={label.names.join()} label={label} right={plot.right} />
      ))}
    </g>
  );
}

/** Names at the end of their rungs; many at one height are counted, and none runs out of the figure. */
function RungLabel({ label, right }: { label: PlacedLabel; right: number }) {
  const { names, x, y } = label;
  const text =
    names.length <= 3 ? names.join(", ") : `${names.slice(0, 2).join(", ")} and ${names.length - 2} more`;
  const fits = x + 8 + text.length * LETTER_PX <= right + LETTER_PX;
  return (
    <ChartText x={fits ? x + 8 : right} y={fits ? y + 4 : y - 8} end={!fits} tone="ink" halo>
      {text}
    </ChartText>
  );
}

/** Places along the curve where its name may stand, as shares of its length, the best first. */
const CURVE_NAME_AT = [0.72, 0.8, 0.64, 0.56, 0.88, 0.48, 0.4, 0.94];
/** Least height between the curve's name and another one beside it, px. */
const CLEAR_PX = 15;

/** The curve's name, where it has room: right of it, at a height where no rung is named. */
function CurveLabel({
  ladder,
  taken,
  rt,
}: {
  ladder: Ladder;
  taken: readonly PlacedLabel[];
  /** Height of the thermal energy's line, which is named at the right. */
  rt: number | null;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const { points } = ladder.curve;
  const places = CURVE_NAME_AT.flatMap((share) => {
    const at = points[Math.round((points.length - 1) * share)];
    return at ? [{ x: plot.x(100 * at.population), y: plot.y(at.energy) }] : [];
  });
  const clear = (y: number) =>
    taken.every((label) => Math.abs(label.y - y) > CLEAR_PX) && (rt === null || Math.abs(rt - y) > CLEAR_PX);
  const place = places.find(({ y }) => clear(y));
  if (!place) return null;
  const { x, y } = place;
  return (
    <>
      <path d={`M${x + 3} ${y}H${x + 22}`} stroke="var(--color-ink-3)" strokeWidth={1} />
      <ChartText x={x + 26} y={y + 4} halo>
        {ladder.curve.weight === 1
          ? ""
          : `${fixed(ladder.curve.weight, Number.isInteger(ladder.curve.weight) ? 0 : 2)} `}
        exp(−E/RT) / Z
      </ChartText>
    </>
  );
}

function WindowBand({
  plot,
  windowKcal,
  outside,
}: {
  plot: NonNullable<ReturnType<typeof usePlot>>;
  windowKcal: number;
  outside: Outside;
}) {
  const y = plot.y(windowKcal);
  return (
    <>
      <rect
        x={plot.left}
        y={plot.top}
        width={Math.max(0, plot.right - plot.left)}
        height={Math.max(0, y - plot.top)}
        fill="var(--color-sunk)"
      />
      <path d={`M${plot.left} ${y}H${plot.right}`} stroke="var(--color-mark)" strokeDasharray="5 4" />
      <ChartText x={plot.right} y={y + 15} end tone="mark" halo>
        window {formatEnergy(windowKcal)}
      </ChartText>
      <ChartText x={plot.right - 8} y={Math.max(plot.top + 12, (plot.top + y) / 2 + 4)} end>
        outside: {plural(outside.count, "conformer")}
        {outside.count > 0 ? `, ${shareFigure(outside.share)}` : ""}
      </ChartText>
    </>
  );
}

function Bar({
  x,
  y,
  width,
  population,
  selected,
  pale,
}: {
  x: number;
  y: number;
  width: number;
  population: number;
  selected: boolean;
  pale: boolean;
}) {
  const length = Math.max(0, width);
  return (
    <g opacity={pale ? PALE : undefined}>
      <rect x={x} y={y - BAR / 2} width={length} height={BAR} fill={depthColour(population)} />
      <rect
        x={x + Math.max(0, length - 1.5)}
        y={y - BAR / 2 - (selected ? 2 : 0)}
        width={1.5}
        height={BAR + (selected ? 4 : 0)}
        fill={selected ? "var(--color-mark)" : "var(--color-ink)"}
      />
    </g>
  );
}
