import { useFetcher } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { formatDate } from "~/lib/format";
import type { ActAnswer } from "./act-answer";

/**
 * What was removed lately, each with the way back for thirty days.
 *
 * @param action address of the page whose act `restore` brings one back
 * @param field under which the form names it
 */
export function RemovedList({
  removed,
  action,
  field,
}: {
  removed: readonly { id: string; name: string; removedAt: string }[];
  action: string;
  field: string;
}) {
  const restore = useFetcher<ActAnswer>();
  const { data, state } = restore;
  if (removed.length === 0) return null;
  const refused = data && !data.ok ? data.message : undefined;
  return (
    <section className="mt-9 max-w-[46rem] print:hidden">
      <BlockHead title="Removed within thirty days" />
      <ul className="border-t border-rule">
        {removed.map(({ id, name, removedAt }) => (
          <li
            key={id}
            className="flex flex-wrap items-center justify-between gap-3 border-b border-rule py-2"
          >
            <span className="min-w-0 wrap-anywhere">
              {name} <span className="text-xs text-ink-3">removed {formatDate(removedAt)}</span>
            </span>
            <restore.Form method="post" action={action}>
              <input type="hidden" name="intent" value="restore" />
              <input type="hidden" name={field} value={id} />
              <SubmitButton kind="plain" size="sm" pending={state !== "idle"}>
                Bring back<span className="sr-only"> {name}</span>
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
