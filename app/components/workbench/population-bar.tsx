import { depthFill } from "~/components/ui/depth-strip";

/** Share of the common scale as a bar in its tint with an ink cap; the figure stands beside it. */
export function PopulationBar({ population, widest }: { population: number; widest: number }) {
  const share = widest > 0 ? Math.min(1, population / widest) : 0;
  return (
    <svg aria-hidden="true" width="100%" height="12" className="block overflow-visible">
      <rect width={`${100 * share}%`} height="12" className={depthFill(population)} />
      <rect x={`${100 * share}%`} width="1.5" height="12" transform="translate(-1.5)" className="fill-ink" />
    </svg>
  );
}
