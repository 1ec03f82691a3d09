import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, Plot, usePlot } from "~/components/charts/plot";
import { depthColour } from "~/components/ui/depth-strip";
import { formatPercent, formatTemperature, withUnit } from "~/lib/format";

const LOW_K = 150;
const HIGH_K = 500;
const STEP_K = 5;
/** Conformers drawn one by one; the rest is one band. */
const DRAWN = 16;
const NAMED = 5;

/** Shares of the ensemble against temperature, stacked from the lowest up, each in the tint of its share there. */
export function TemperatureSweep({
  names,
  populationsAt,
  temperatureK,
  note,
}: {
  names: readonly string[];
  populationsAt: (temperatureK: number) => Float64Array;
  temperatureK: number;
  note?: string;
}) {
  const kelvins = Array.from({ length: (HIGH_K - LOW_K) / STEP_K + 1 }, (_, k) => LOW_K + k * STEP_K);
  const shares = kelvins.map((kelvin) => populationsAt(kelvin));
  const drawn = Math.min(DRAWN, names.length);
  const rest = names.length - drawn;
  return (
    <ChartFrame
      title="Temperature sweep"
      fileName="temperature-sweep"
      note={note}
      data={{
        columns: [
          { name: "temperature", unit: "K", digits: 0 },
          ...names.slice(0, drawn).map((name) => ({ name, unit: "%", digits: 1 })),
          ...(rest > 0 ? [{ name: `${rest} more`, unit: "%", digits: 1 }] : []),
        ],
        rows: kelvins.map((kelvin, k) => {
          const at = shares[k] ?? new Float64Array();
          const own = Array.from(at.subarray(0, drawn), (share) => 100 * share);
          return [kelvin, ...own, ...(rest > 0 ? [100 - own.reduce((sum, share) => sum + share, 0)] : [])];
        }),
      }}
    >
      <Plot
        label="Shares of the ensemble against temperature"
        height={300}
        x={{ title: "temperature, K", low: LOW_K, high: HIGH_K + 40, ticks: [150, 200, 300, 400, 500] }}
        y={{
          title: "share of the ensemble, %, c1 at the bottom",
          low: 0,
          high: 100,
          ticks: [0, 25, 50, 75, 100],
        }}
        points={kelvins
          .filter((kelvin) => kelvin % 50 === 0)
          .map((kelvin) => {
            const at = populationsAt(kelvin);
            return {
              x: kelvin,
              y: 100 * (at[0] ?? 0),
              label: `${withUnit(formatTemperature(kelvin), "K")}: ${names
                .slice(0, 3)
                .map((name, k) => `${name} ${formatPercent(at[k], 1)}`)
                .join(", ")}`,
            };
          })}
      >
        <Bands kelvins={kelvins} shares={shares} drawn={drawn} names={names} temperatureK={temperatureK} />
      </Plot>
    </ChartFrame>
  );
}

function Bands({
  kelvins,
  shares,
  drawn,
  names,
  temperatureK,
}: {
  kelvins: readonly number[];
  shares: readonly Float64Array[];
  drawn: number;
  names: readonly string[];
  temperatureK: number;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const below = kelvins.map(() => 0);
  const bands: {
    key: string;
    tiles: { d: string; fill: string }[];
    line: string;
    end: number;
    share: number;
  }[] = [];
  for (let place = 0; place <= drawn; place++) {
    const share = (k: number) =>
      place < drawn ? (shares[k]?.[place] ?? 0) : Math.max(0, 1 - (below[k] ?? 0));
    if (place === drawn && drawn === names.length) break;
    const tiles: { d: string; fill: string }[] = [];
    for (let k = 0; k + 1 < kelvins.length; k++) {
      const [x1, x2] = [plot.x(kelvins[k] ?? 0), plot.x(kelvins[k + 1] ?? 0)];
      const low = [below[k] ?? 0, below[k + 1] ?? 0] as const;
      const top = [low[0] + share(k), low[1] + share(k + 1)] as const;
      const y = (value: number) => plot.y(100 * value);
      const tint = place < drawn ? depthColour((share(k) + share(k + 1)) / 2) : "var(--color-depth-1)";
      tiles.push({
        d: `M${x1} ${y(low[0])}L${x2 + 0.4} ${y(low[1])}V${y(top[1])}L${x1} ${y(top[0])}Z`,
        fill: tint,
      });
    }
    const last = kelvins.length - 1;
    const end = (below[last] ?? 0) + share(last) / 2;
    const endShare = share(last);
    for (const k of kelvins.keys()) below[k] = (below[k] ?? 0) + share(k);
    const line = kelvins
      .map((kelvin, k) => `${k === 0 ? "M" : "L"}${plot.x(kelvin)} ${plot.y(100 * (below[k] ?? 0))}`)
      .join("");
    bands.push({ key: place < drawn ? (names[place] ?? "") : "rest", tiles, line, end, share: endShare });
  }
  const here = temperatureK >= LOW_K && temperatureK <= HIGH_K;
  return (
    <g>
      {bands.map((band) => (
        <g key={band.key}>
          {band.tiles.map((tile) => (
            <path key={tile.d} d={tile.d} fill={tile.fill} />
          ))}
        </g>
      ))}
      {bands.map((band) => (
        <path key={band.key} d={band.line} fill="none" stroke="var(--color-paper)" strokeWidth={0.8} />
      ))}
      {bands.slice(0, NAMED).map((band) =>
        band.share > 0.03 ? (
          <ChartText key={band.key} x={plot.x(HIGH_K) + 6} y={plot.y(100 * band.end) + 4} tone="ink">
            {band.key}
          </ChartText>
        ) : null,
      )}
      {here ? (
        <g>
          <path
            d={`M${plot.x(temperatureK)} ${plot.top}V${plot.bottom}`}
            stroke="var(--color-mark)"
            strokeWidth={1.5}
            strokeDasharray="5 4"
          />
          <ChartText x={plot.x(temperatureK) + 5} y={plot.top - 3} tone="mark" halo>
            {withUnit(formatTemperature(temperatureK), "K")}
          </ChartText>
        </g>
      ) : null}
    </g>
  );
}
