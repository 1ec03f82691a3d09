import { Link, useMatches } from "react-router";

export interface Crumb {
  label: string;
  /** Left out for the page itself. */
  to?: string;
}

/**
 * What a route's `handle` may carry. `crumbs` gets the data of its own loader (`undefined` when that failed) and
 * returns the steps it adds.
 *
 * @example export const handle: ShellHandle<typeof loader> = { crumbs: (data) => [{ label: data.team.name, to: "..." }] }
 */
export interface ShellHandle<Data = unknown> {
  crumbs?: (data: Data) => readonly Crumb[];
}

/** The steps to this page, from the handles of all matched routes. */
export function useCrumbs(): readonly Crumb[] {
  return useMatches().flatMap((match) => {
    const handle = match.handle as ShellHandle<never> | undefined;
    return match.loaderData === undefined ? [] : (handle?.crumbs?.(match.loaderData as never) ?? []);
  });
}

/** Team, series, page; the last one is where you are. Phones show that one only. */
export function Breadcrumbs({ crumbs }: { crumbs: readonly Crumb[] }) {
  if (crumbs.length === 0) return null;
  return (
    <nav aria-label="Breadcrumb" className="min-w-0">
      <ol className="flex min-w-0 items-center gap-2">
        {crumbs.map((crumb, i) => {
          const last = i === crumbs.length - 1;
          return (
            <li
              key={i}
              className={`flex min-w-0 items-center gap-2 ${last ? "" : "max-sm:hidden [&:not(:last-child)]:shrink-0"}`}
            >
              {i > 0 ? (
                <span aria-hidden="true" className="text-rule-2 max-sm:hidden">
                  /
                </span>
              ) : null}
              {last || crumb.to === undefined ? (
                <span
                  aria-current={last ? "page" : undefined}
                  className={`truncate ${last ? "font-medium text-ink" : "text-ink-3"}`}
                >
                  {crumb.label}
                </span>
              ) : (
                <Link to={crumb.to} className="truncate text-ink-2 no-underline hover:underline">
                  {crumb.label}
                </Link>
              )}
            </li>
          );
        })}
      </ol>
    </nav>
  );
}
