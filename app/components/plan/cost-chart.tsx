import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, Plot, usePlot } from "~/components/charts/plot";
import { formatPercent, withUnit } from "~/lib/format";
import type { FrontPoint } from "~/lib/plan/front";
import { keptOrder, marginalCosts } from "~/lib/plan/front";
import type { PlanSet } from "~/lib/plan/plan";
import type { PlansReport } from "~/lib/plan/report";
import { formatHours } from "~/lib/plan/words";

interface Placed {
  name: string;
  kept: number;
  cost: number;
  each: number | null;
  chosen: boolean;
}

/** What a share of the population costs: the plans joined by a line, the cheapest windows as a grey step. */
export function CostChart({ set, report }: { set: PlanSet; report: PlansReport }) {
  const figures = report.outcomes.map((o) => ({ kept: o.kept.mean, cost: o.cost }));
  const each = marginalCosts(figures);
  const placed = keptOrder(figures).flatMap((k): Placed[] => {
    const figure = figures[k];
    const name = set.plans[k]?.name ?? "";
    return figure ? [{ ...figure, name, each: each[k] ?? null, chosen: k === set.chosen }] : [];
  });
  const least = Math.min(...placed.map((p) => 100 * p.kept));
  const low = Math.max(0, Math.min(80, 10 * Math.floor((least - 3) / 10)));
  const high = 1.12 * Math.max(...placed.map((p) => p.cost), 1e-9);
  const front = (report.front ?? []).filter((p) => 100 * p.kept >= low && p.cost <= high);
  return (
    <ChartFrame
      title="What each further percent costs"
      fileName="cost-of-a-share"
      data={{
        columns: [
          { name: "plan" },
          { name: "population kept", unit: "%", digits: 1 },
          { name: "cost", unit: "core hours", digits: 2 },
          { name: "each further percent", unit: "core hours", digits: 2 },
        ],
        rows: [
          ...placed.map((p) => [p.name, 100 * p.kept, p.cost, p.each]),
          ...front.map((p) => ["cheapest windows", 100 * p.kept, p.cost, null]),
        ],
      }}
      note={
        front.length > 0
          ? "Numbers beside the line: core hours for each further percent. Grey: the cheapest windows for a share."
          : "Numbers beside the line: core hours for each further percent."
      }
    >
      <Plot
        height={360}
        axisWidth={52}
        label="Cost in core hours against the population kept"
        x={{ title: "population kept, expected, %", low, high: 100.8 }}
        y={{ title: "cost, core hours", low: 0, high }}
        points={placed.map((p) => ({
          x: 100 * p.kept,
          y: p.cost,
          label: `${p.name}: ${formatPercent(p.kept, 1)} for ${withUnit(formatHours(p.cost), "core hours")}`,
        }))}
      >
        <CostLayer placed={placed} front={front} />
      </Plot>
    </ChartFrame>
  );
}

function CostLayer({ placed, front }: { placed: readonly Placed[]; front: readonly FrontPoint[] }) {
  const plot = usePlot();
  if (!plot) return null;
  const at = (p: { kept: number; cost: number }) => ({ x: plot.x(100 * p.kept), y: plot.y(p.cost) });
  let step = "";
  for (const [k, point] of front.entries()) {
    const { x, y } = at(point);
    step += k === 0 ? `M${x} ${y}` : `V${y}H${x}`;
  }
  const line = placed.map((p) => `${at(p).x} ${at(p).y}`).join("L");
  return (
    <g>
      {step ? <path d={step} fill="none" stroke="var(--color-ink-off)" /> : null}
      {placed.length > 1 ? (
        <path d={`M${line}`} fill="none" stroke="var(--color-ink)" strokeWidth={1.75} />
      ) : null}
      {placed.map((p, k) => {
        const { x, y } = at(p);
        // Plans that come to the same would print their names on each other: the one at hand is named, else the first.
        const hidden = placed.some(
          (other, o) =>
            o !== k &&
            Math.hypot(at(other).x - x, at(other).y - y) < 14 &&
            (other.chosen || (o < k && !p.chosen)),
        );
        const before = placed[k - 1];
        const from = before ? at(before) : null;
        const far = from ? Math.hypot(x - from.x, y - from.y) > 46 : false;
        return (
          <g key={p.name}>
            <circle
              cx={x}
              cy={y}
              r={4}
              fill={p.chosen ? "var(--color-mark)" : "var(--color-paper)"}
              stroke={p.chosen ? "var(--color-mark)" : "var(--color-ink)"}
            />
            {hidden ? null : (
              <ChartText x={x - 8} y={y - 8} end tone={p.chosen ? "mark" : "ink"} halo>
                {p.name}, {formatHours(p.cost)}
              </ChartText>
            )}
            {from && far && p.each !== null ? (
              <ChartText x={(x + from.x) / 2 + 6} y={(y + from.y) / 2 + 14} halo>
                {formatHours(p.each)}
              </ChartText>
            ) : null}
          </g>
        );
      })}
    </g>
  );
}
