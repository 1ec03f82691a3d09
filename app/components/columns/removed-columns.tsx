import { href, useFetcher } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import type { ActAnswer } from "~/components/workbench/act-answer";
import type { RemovedColumnView } from "~/lib/columns-view";
import { formatDate } from "~/lib/format";

/** Columns that were removed, each with the way back. */
export function RemovedColumns({
  ensembleId,
  removed,
}: {
  ensembleId: string;
  removed: readonly RemovedColumnView[];
}) {
  const restore = useFetcher<ActAnswer>();
  if (removed.length === 0) return null;
  const refused = restore.data && !restore.data.ok ? restore.data.message : undefined;
  return (
    <section className="mt-9 max-w-[46rem] print:hidden">
      <BlockHead title="Removed within thirty days" />
      <ul className="border-t border-rule">
        {removed.map((column) => (
          <li
            key={column.id}
            className="flex flex-wrap items-center justify-between gap-3 border-b border-rule py-2"
          >
            <span>
              {column.name} <span className="text-xs text-ink-3">removed {formatDate(column.removedAt)}</span>
            </span>
            <restore.Form method="post" action={href("/ensembles/:id/columns", { id: ensembleId })}>
              <input type="hidden" name="intent" value="restore" />
              <input type="hidden" name="column" value={column.id} />
              <SubmitButton kind="plain" size="sm" pending={restore.state !== "idle"}>
                Bring back
              </SubmitButton>
            </restore.Form>
          </li>
        ))}
      </ul>
      {refused ? (
        <p role="alert" className="mt-2 text-xs text-danger">
          {refused}
        </p>
      ) : null}
    </section>
  );
}
