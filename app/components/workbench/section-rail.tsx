import { useEffect, useRef } from "react";
import { Link, useLocation } from "react-router";
import { pageClass } from "~/components/layout/app-shell";
import type { StationView } from "~/lib/workbench/stations";

const NODES = {
  done: "before:bg-ink-3 before:rounded-full before:border-ink-3",
  todo: "before:bg-paper before:rounded-full before:border-ink-3",
  care: "before:bg-held-edge before:rounded-[1px] before:border-held-edge",
};
const HERE =
  "before:bg-mark before:border-mark before:rounded-full before:ring-1 before:ring-mark before:ring-offset-3 before:ring-offset-paper";

/** The course line: the sections as stations, you are at the magenta one. What is selected goes along. */
export function SectionRail({
  base,
  here,
  stations,
}: {
  /** Address of the ensemble. */
  base: string;
  here: string;
  stations: readonly StationView[];
}) {
  const { search } = useLocation();
  const rail = useRef<HTMLDivElement>(null);
  // biome-ignore lint/correctness/useExhaustiveDependencies: the current station is another one
  useEffect(() => {
    const box = rail.current;
    const current = box?.querySelector<HTMLElement>("[aria-current=page]");
    if (!box || !current) return;
    box.scrollLeft = current.offsetLeft - (box.clientWidth - current.clientWidth) / 2;
  }, [here]);
  return (
    <div className="sticky top-0 z-20 border-b border-rule bg-paper print:hidden">
      <nav
        aria-label="Sections"
        ref={rail}
        className={`${pageClass} relative overflow-x-auto [scrollbar-width:none]`}
      >
        <ul className="flex min-w-max">
          {stations.map((station, k) => {
            const current = station.path === here;
            const last = k === stations.length - 1;
            return (
              <li
                key={station.path}
                className={`relative flex-1 after:absolute after:top-[11px] after:left-0 after:border-t after:border-rule-2 ${last ? "after:w-2.5" : "after:right-0"}`}
              >
                <Link
                  to={{ pathname: `${base}/${station.path}`, search }}
                  prefetch="intent"
                  aria-current={current ? "page" : undefined}
                  className={`relative block pt-[22px] pr-5 pb-2 no-underline before:absolute before:top-[7px] before:left-0 before:z-1 before:size-[9px] before:border-[1.5px] hover:text-ink ${
                    current
                      ? `text-ink shadow-[inset_0_-2px_0_var(--color-mark)] ${HERE}`
                      : `text-ink-2 ${NODES[station.state]}`
                  }`}
                >
                  <span className={`block whitespace-nowrap ${current ? "font-semibold" : "font-medium"}`}>
                    {station.name}
                  </span>
                  <span className="figures block text-xs whitespace-nowrap text-ink-3">{station.figure}</span>
                </Link>
              </li>
            );
          })}
        </ul>
      </nav>
    </div>
  );
}
