import { href, Link } from "react-router";
import { formatCount } from "~/lib/format";

const TAB =
  "flex shrink-0 items-baseline gap-1 py-2 font-medium whitespace-nowrap text-ink-2 no-underline hover:text-ink aria-[current=page]:text-ink aria-[current=page]:inset-shadow-[0_-2px_0_var(--color-mark)] pointer-coarse:py-3";

/** The series of a team, at the right its people and tokens; you are at the magenta one. */
export function TeamTabs({
  team,
  series,
  chosen,
  at = "series",
}: {
  team: string;
  series: readonly { id: string; name: string; ensembles: number }[];
  /** Id of the series shown; null shows all. */
  chosen: string | null;
  at?: "series" | "people" | "tokens" | "logbook";
}) {
  const base = href("/teams/:team", { team });
  const all = series.reduce((sum, one) => sum + one.ensembles, 0);
  const here = (yes: boolean) => (yes ? "page" : undefined);
  return (
    <nav
      aria-label="Team"
      className="mt-6 flex items-end gap-6 overflow-x-auto border-b border-rule max-sm:-mx-4 max-sm:px-4"
    >
      <Link to={base} className={TAB} aria-current={here(at === "series" && chosen === null)}>
        All <Count n={all} />
      </Link>
      {series.map((one) => (
        <Link
          key={one.id}
          to={`${base}?series=${one.id}`}
          className={TAB}
          aria-current={here(at === "series" && chosen === one.id)}
        >
          {one.name} <Count n={one.ensembles} />
        </Link>
      ))}
      <Link
        to={href("/teams/:team/people", { team })}
        className={`ml-auto ${TAB}`}
        aria-current={here(at === "people")}
      >
        People
      </Link>
      <Link to={href("/teams/:team/tokens", { team })} className={TAB} aria-current={here(at === "tokens")}>
        Tokens
      </Link>
      <Link to={href("/teams/:team/logbook", { team })} className={TAB} aria-current={here(at === "logbook")}>
        Logbook
      </Link>
    </nav>
  );
}

function Count({ n }: { n: number }) {
  return <span className="figures text-xs font-normal text-ink-3">{formatCount(n)}</span>;
}
