import type { ReactNode } from "react";
import { depthColour } from "~/components/ui/depth-strip";
import { formatPercent } from "~/lib/format";

export interface Pick {
  frame: number;
  /** "c1"; without it the frame number stands alone. */
  name?: string;
  population: number | null;
  /** The measured quantity in this conformer, with its unit; null where nothing is measured. */
  measure: string | null;
  held?: boolean;
}

/** More rows push everything below them off the page. */
const MOST_ROWS = 8;

/** The selected conformers with their measure and population, and below them what else was measured. */
export function PicksList({
  picks,
  measureLabel,
  facts = [],
}: {
  picks: readonly Pick[];
  /** "C3–C4–N5–S6"; null where fewer than two atoms are picked. */
  measureLabel: string | null;
  facts?: readonly { label: ReactNode; text: string }[];
}) {
  const shown = picks.slice(0, MOST_ROWS);
  const heading = [measureLabel, "population"].filter((part) => part !== null).join(", ");
  return (
    <div>
      <div className="flex justify-between gap-3 text-xs font-medium text-ink-3">
        <p>{picks.length === 0 ? "Nothing selected" : `${picks.length} selected`}</p>
        {picks.length > 0 ? <p className="text-right">{heading}</p> : null}
      </div>
      {picks.length > 0 ? (
        <ul className="mt-2 border-t border-rule" aria-label="Selected conformers">
          {shown.map((pick) => (
            <PickRow key={pick.frame} pick={pick} />
          ))}
          {picks.length > MOST_ROWS ? (
            <li className="flex min-h-9 items-center border-b border-rule text-ink-2">
              and {picks.length - MOST_ROWS} more
            </li>
          ) : null}
        </ul>
      ) : null}
      {facts.length > 0 ? (
        <dl className="figures mt-3 grid gap-1">
          {facts.map((fact, k) => (
            <div key={k} className="flex justify-between gap-4">
              <dt className="text-ink-2">{fact.label}</dt>
              <dd className="whitespace-nowrap">{fact.text}</dd>
            </div>
          ))}
        </dl>
      ) : null}
    </div>
  );
}

function PickRow({ pick }: { pick: Pick }) {
  const fill = pick.held
    ? "var(--color-held-edge)"
    : pick.population === null
      ? "var(--color-edge)"
      : depthColour(pick.population);
  return (
    <li className="figures grid min-h-9 grid-cols-[0.875rem_2.25rem_1fr_auto_3.5rem] items-center gap-3 border-b border-rule">
      <svg aria-hidden="true" width="14" height="14" className="block">
        <rect x="0.5" y="0.5" width="13" height="13" rx="2" fill={fill} className="stroke-edge" />
      </svg>
      <b className="font-semibold">{pick.name ?? ""}</b>
      <span className={pick.held ? "text-held" : "text-ink-3"}>
        frame {pick.frame}
        {pick.held ? ", held" : ""}
      </span>
      <span className="text-ink-2">{pick.measure ?? ""}</span>
      <span className="text-right">{formatPercent(pick.population, 1)}</span>
    </li>
  );
}
