import { type ReactNode, useEffect, useRef, useState } from "react";
import { fixed } from "~/lib/format";
import { roundTicks, tickDigits } from "~/lib/workbench/ticks";

/** Width before the first measure, and where nothing measures. */
const FIRST_WIDTH = 438;
const ROW = 26;
const TOP = 8;
const FOOT = 40;

export interface RowScales {
  x: (value: number) => number;
  left: number;
  right: number;
}

export interface ChartRow {
  key: string;
  label: string;
  /** Figures at the left of the scale and at its right end, right-aligned. */
  before?: string;
  after?: readonly string[];
  selected?: boolean;
  /** What it says to those who do not see it. */
  words: string;
  onChoose?: () => void;
  draw: (scales: RowScales, y: number) => ReactNode;
}

/** Rows on one horizontal scale: a name, marks, figures at the ends. Drawn at the width of its place, text unscaled. */
export function RowChart({
  label,
  rows,
  high,
  axis,
  heads,
  beforeWidth = 0,
  afterWidth = 0,
}: {
  label: string;
  rows: readonly ChartRow[];
  /** Upper end of the scale, which begins at 0. */
  high: number;
  /** "population, %" */
  axis: string;
  /** Heads of the figure columns: before, then after. */
  heads?: { before?: string; after?: readonly string[] };
  beforeWidth?: number;
  afterWidth?: number;
}) {
  const box = useRef<HTMLDivElement>(null);
  const [width, setWidth] = useState(FIRST_WIDTH);
  useEffect(() => {
    const element = box.current;
    if (!element) return;
    const observer = new ResizeObserver(([entry]) => {
      if (entry) setWidth(Math.max(260, Math.floor(entry.contentRect.width)));
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, []);
  const columns = rows[0]?.after?.length ?? 0;
  const head = heads ? 18 : 0;
  const left = 34 + beforeWidth;
  const right = width - 8 - afterWidth * columns;
  const ticks = roundTicks(0, high, right - left < 220 ? 4 : 6);
  const scales: RowScales = { left, right, x: (value) => left + ((right - left) * value) / high };
  const bottom = head + TOP + ROW * rows.length;
  return (
    <div ref={box} className="min-w-0">
      {/* biome-ignore lint/a11y/useSemanticElements: a drawing has no fieldset */}
      <svg
        role="group"
        aria-label={label}
        width={width}
        height={bottom + FOOT}
        className="figures block max-w-full overflow-visible"
        fontSize={12}
      >
        {heads ? (
          <g fill="var(--color-ink-3)">
            {heads.before ? (
              <text x={left - 10} y={11} textAnchor="end">
                {heads.before}
              </text>
            ) : null}
            {heads.after?.map((text, k) => (
              <text key={text} x={right + afterWidth * (k + 1)} y={11} textAnchor="end">
                {text}
              </text>
            ))}
          </g>
        ) : null}
        {rows.map((row, k) => (
          <Row
            key={row.key}
            row={row}
            y={head + TOP + ROW * k + ROW / 2}
            scales={scales}
            width={width}
            afterWidth={afterWidth}
          />
        ))}
        <path d={`M${left} ${head}V${bottom}H${right}`} fill="none" stroke="var(--color-rule-2)" />
        {ticks.map((tick) => (
          <g key={tick}>
            <path d={`M${scales.x(tick)} ${bottom}v4`} stroke="var(--color-rule-2)" />
            <text x={scales.x(tick)} y={bottom + 17} textAnchor="middle" fill="var(--color-ink-3)">
              {fixed(tick, tickDigits(ticks))}
            </text>
          </g>
        ))}
        <text x={right} y={bottom + 35} textAnchor="end" fill="var(--color-ink-3)">
          {axis}
        </text>
      </svg>
    </div>
  );
}

function Row({
  row,
  y,
  scales,
  width,
  afterWidth,
}: {
  row: ChartRow;
  y: number;
  scales: RowScales;
  width: number;
  afterWidth: number;
}) {
  const marks = (
    <>
      {row.selected ? (
        <g data-screen-only="true">
          <rect x={0} y={y - ROW / 2} width={width} height={ROW} fill="var(--color-mark-wash)" />
          <rect x={0} y={y - ROW / 2} width={3} height={ROW} fill="var(--color-mark)" />
        </g>
      ) : null}
      <rect x={0} y={y - ROW / 2} width={width} height={ROW} fill="transparent" />
      <text x={8} y={y + 4} fill="var(--color-ink)" fontWeight={600}>
        {row.label}
      </text>
      {row.before === undefined ? null : (
        <text x={scales.left - 10} y={y + 4} textAnchor="end" fill="var(--color-ink-2)">
          {row.before}
        </text>
      )}
      {row.draw(scales, y)}
      {row.after?.map((text, k) => (
        <text
          key={k}
          x={scales.right + afterWidth * (k + 1)}
          y={y + 4}
          textAnchor="end"
          fill="var(--color-ink)"
        >
          {text}
        </text>
      ))}
    </>
  );
  return (
    // biome-ignore lint/a11y/noStaticElementInteractions: the role depends on whether there is something to select
    <g
      role={row.onChoose ? "button" : "img"}
      tabIndex={row.onChoose ? 0 : undefined}
      aria-label={row.selected ? `${row.words}, selected` : row.words}
      className={row.onChoose ? "cursor-pointer" : undefined}
      onClick={row.onChoose}
      onKeyDown={(event) => {
        if (event.key !== "Enter" && event.key !== " ") return;
        event.preventDefault();
        row.onChoose?.();
      }}
    >
      {marks}
    </g>
  );
}
