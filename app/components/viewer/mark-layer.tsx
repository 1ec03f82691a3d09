import type { Mark, Token } from "~/lib/view/mark";

export function tokenColour(token: Token): string {
  return `var(--color-${token})`;
}

/** Marks as SVG children; the picture of the whole is named by whoever draws it. */
export function MarkLayer({ marks }: { marks: readonly Mark[] }) {
  return marks.map((mark, k) => <MarkShape key={k} mark={mark} />);
}

function MarkShape({ mark }: { mark: Mark }) {
  switch (mark.kind) {
    case "line":
      return (
        <polyline
          points={mark.points.map(([x, y]) => `${round(x)},${round(y)}`).join(" ")}
          fill="none"
          stroke={tokenColour(mark.stroke)}
          strokeWidth={mark.width}
          strokeDasharray={mark.dash?.join(" ")}
          strokeLinejoin="round"
          strokeLinecap={mark.dash ? "butt" : "round"}
        />
      );
    case "ring":
      return (
        <circle
          cx={round(mark.x)}
          cy={round(mark.y)}
          r={mark.radius}
          fill={mark.fill ? tokenColour(mark.fill) : "none"}
          stroke={tokenColour(mark.stroke)}
          strokeWidth={mark.width}
        />
      );
    case "box":
      return (
        <rect
          x={round(mark.x)}
          y={round(mark.y)}
          width={round(mark.width)}
          height={mark.height}
          rx={mark.height > 8 ? 2 : 0}
          fill={tokenColour(mark.fill)}
          stroke={tokenColour(mark.stroke)}
        />
      );
    case "text":
      return (
        <text
          x={round(mark.x)}
          y={round(mark.y)}
          textAnchor={mark.anchor}
          fill={tokenColour(mark.fill)}
          stroke={mark.halo ? tokenColour("view") : undefined}
          strokeWidth={mark.halo ? 4 : undefined}
          strokeLinejoin="round"
          paintOrder="stroke"
          className={mark.strong ? "text-xs font-medium" : "text-xs"}
        >
          {mark.text}
        </text>
      );
  }
}

function round(value: number): number {
  return Math.round(value * 10) / 10;
}
