import { useEffect, useRef } from "react";
import { href, useFetcher, useNavigate } from "react-router";
import { Button } from "~/components/ui/button";
import { Note } from "~/components/ui/note";
import { showToast } from "~/components/ui/toast";
import { plural } from "~/lib/format";
import type { ActAnswer } from "./act-answer";

/** Makes held frames of another species, molecule or configuration an ensemble of their own, and goes there. */
export function SplitOff({
  ensembleId,
  frame,
  count,
}: {
  ensembleId: string;
  /** Any one of them. */
  frame: number;
  count: number;
}) {
  const fetcher = useFetcher<ActAnswer>();
  const navigate = useNavigate();
  const { data, state } = fetcher;
  const told = useRef<ActAnswer | undefined>(undefined);
  useEffect(() => {
    if (told.current === data) return;
    told.current = data;
    const made = data?.done?.made;
    if (!made) return;
    showToast({
      tone: "done",
      badge: made.created ? "made" : "already here",
      text: made.created
        ? `${made.name}, of ${plural(made.frames, "frame")}. They stay held where they came from.`
        : `Already here as ${made.name}: the same frames make no second ensemble.`,
    });
    void navigate(href("/ensembles/:id/intake", { id: made.ensembleId }));
  }, [data, navigate]);
  const refused = data && !data.ok ? data.message : undefined;
  const these = count === 1 ? "this frame" : `these ${plural(count, "frame")}`;
  return (
    <fetcher.Form method="post" action={href("/ensembles/:id/intake", { id: ensembleId })}>
      <input type="hidden" name="intent" value="split-off" />
      <input type="hidden" name="frame" value={frame} />
      <Button type="submit" size="sm" aria-busy={state !== "idle"} disabled={state !== "idle"}>
        {state === "idle" ? `Make an ensemble of ${these}` : "Making the ensemble"}
        <span className="sr-only">, from frame {frame} on</span>
      </Button>
      {refused ? (
        <Note tone="danger" className="mt-2">
          <p role="alert">{refused}</p>
        </Note>
      ) : null}
    </fetcher.Form>
  );
}
