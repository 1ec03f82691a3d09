import { useEffect, useRef, useState } from "react";
import { depthStep, formatPercent, formatPopulation } from "~/lib/format";

/** Fill classes of the depth tint, by step from 1. */
export const DEPTH_FILLS = [
  "fill-depth-1",
  "fill-depth-2",
  "fill-depth-3",
  "fill-depth-4",
  "fill-depth-5",
  "fill-depth-6",
  "fill-depth-7",
] as const;

/** CSS colour of the depth tint for a population given as a fraction. */
export function depthColour(fraction: number): string {
  return `var(--color-depth-${depthStep(fraction)})`;
}

/** Class of the depth tint for a population given as a fraction. */
export function depthFill(fraction: number): string {
  return DEPTH_FILLS[depthStep(fraction) - 1] ?? "fill-depth-1";
}

/** Segments narrower than this carry no gap: their tail would be all gaps. */
const GAP_FROM = 0.012;

interface Segment {
  x: number;
  share: number;
  /** Population that decides the tint: that of one conformer, the mean one where the segment stands for several. */
  each: number;
}

function segments(shares: readonly number[], conformers = shares.length): Segment[] {
  const together = conformers - shares.length + 1;
  let x = 0;
  return shares.map((share, i) => {
    const segment = { x, share, each: i === shares.length - 1 ? share / together : share };
    x += share;
    return segment;
  });
}

function Bars({ all, height }: { all: readonly Segment[]; height: number }) {
  return (
    <>
      {all.map(({ x, share, each }, i) => (
        <rect
          key={i}
          x={`${x * 100}%`}
          width={`${share * 100}%`}
          height={height}
          className={depthFill(each)}
        />
      ))}
      {all.map(({ x, share }, i) =>
        i > 0 && share >= GAP_FROM ? (
          <rect
            key={i}
            x={`${x * 100}%`}
            width="1.5"
            height={height}
            transform="translate(-0.75)"
            className="fill-paper"
          />
        ) : null,
      )}
    </>
  );
}

/** What a strip shows, in words. */
export function stripWords(shares: readonly number[], conformers = shares.length): string {
  const first = shares.slice(0, 3).map((share) => formatPercent(share, 1));
  const rest = conformers - first.length;
  return `Populations, largest first: ${first.join(", ")}${rest > 0 ? `, and ${rest} more` : ""}`;
}

/** An ensemble's populations as one bar, largest left. The figure stands beside it. */
export function DepthStrip({
  shares,
  conformers = shares.length,
  height = 12,
  label = stripWords(shares, conformers),
}: {
  /** Fractions in falling order. */
  shares: readonly number[];
  /** How many there are in all: where more, the last share is that of all the others together. */
  conformers?: number;
  height?: number;
  label?: string;
}) {
  return (
    <svg role="img" aria-label={label} width="100%" height={height} className="block">
      <Bars all={segments(shares, conformers)} height={height} />
    </svg>
  );
}

/** Width of an element, `assumed` until it is measured. */
function useWidth(assumed: number) {
  const ref = useRef<HTMLDivElement>(null);
  const [width, setWidth] = useState(assumed);
  useEffect(() => {
    if (!ref.current) return;
    const watch = new ResizeObserver(([entry]) => entry && setWidth(entry.contentRect.width));
    watch.observe(ref.current);
    return () => watch.disconnect();
  }, []);
  return [ref, width] as const;
}

/** The tall strip with names below its segments; names and figures go where they no longer fit. */
export function LabelledDepthStrip({
  shares,
  names,
  height = 36,
}: {
  /** Fractions in falling order, and the names of their conformers. */
  shares: readonly number[];
  names: readonly string[];
  height?: number;
}) {
  const [ref, width] = useWidth(1200);
  const all = segments(shares);
  const named = all.findIndex(({ share }) => share * width < 26);
  const shown = named === -1 ? all.length : named;
  const last = all[shown - 1];
  const roomAtEnd = last ? width * (1 - last.x) > 96 : true;
  return (
    <div ref={ref}>
      <svg role="img" aria-label={stripWords(shares)} width="100%" height={height + 20} className="block">
        <Bars all={all} height={height} />
        {all.slice(0, shown).map(({ x, share }, i) => (
          <text key={i} x={`${x * 100}%`} y={height + 16} className="fill-ink text-xs font-semibold">
            {names[i]}
            {share * width > 72 ? (
              <tspan className="fill-ink-3 font-normal"> {formatPopulation(share)} %</tspan>
            ) : null}
          </text>
        ))}
        {shown < all.length && roomAtEnd ? (
          <text x="100%" y={height + 16} textAnchor="end" className="fill-ink-3 text-xs">
            and {all.length - shown} more
          </text>
        ) : null}
      </svg>
    </div>
  );
}
