import { DEPTH_FILLS } from "./depth-strip";

const LABELS = ["below 1", "1", "2", "5", "10", "20", "40 and more"];
const SHORT = ["<1", "1", "2", "5", "10", "20", "40 up"];

/** The seven tints with their break points. */
export function DepthKey({ className = "max-w-110" }: { className?: string }) {
  return (
    <div className={`@container ${className}`}>
      <p className="text-xs text-ink-3">Population, %</p>
      <svg
        role="img"
        aria-label="Seven tints, from light to deep: below 1, from 1, 2, 5, 10, 20, and 40 per cent on"
        width="100%"
        height="30"
        className="mt-1 block overflow-visible"
      >
        {DEPTH_FILLS.map((fill, i) => (
          <rect key={fill} x={`${(i / 7) * 100}%`} width={`${100 / 7 - 0.25}%`} height="8" className={fill} />
        ))}
        {[LABELS, SHORT].map((labels, set) => (
          <g key={labels[0]} className={set === 0 ? "@max-sm:hidden" : "@sm:hidden"}>
            {labels.map((text, i) => (
              <text
                key={text}
                x={i === 6 ? "100%" : `${(i / 7) * 100}%`}
                y="24"
                textAnchor={i === 6 ? "end" : "start"}
                className="fill-ink-3 text-xs"
              >
                {text}
              </text>
            ))}
          </g>
        ))}
      </svg>
    </div>
  );
}
