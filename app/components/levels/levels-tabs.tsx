import { href, Link, useLocation } from "react-router";
import { useWorkbench } from "~/components/workbench/workbench-context";

/** The two pages of the section: what the levels say, and what to compute next. */
export function LevelsTabs({ here }: { here: "comparison" | "plan" }) {
  const { ensemble } = useWorkbench();
  const { search } = useLocation();
  const pages = [
    { key: "comparison", label: "Comparison", path: href("/ensembles/:id/levels", { id: ensemble.id }) },
    { key: "plan", label: "Plan", path: href("/ensembles/:id/plan", { id: ensemble.id }) },
  ] as const;
  return (
    <nav aria-label="Levels" className="inline-flex rounded-md border border-edge bg-sheet text-sm">
      {pages.map(({ key, label, path }) => (
        <Link
          key={key}
          to={{ pathname: path, search }}
          aria-current={key === here ? "page" : undefined}
          className={`grid h-9 place-items-center border-l border-rule-2 px-3 font-medium no-underline first:rounded-l-sm first:border-l-0 last:rounded-r-sm pointer-coarse:h-11 ${
            key === here ? "bg-action text-on-action" : "text-ink-2 hover:bg-sunk"
          }`}
        >
          {label}
        </Link>
      ))}
    </nav>
  );
}
