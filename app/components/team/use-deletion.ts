import { useEffect, useRef } from "react";
import { href, useFetcher } from "react-router";
import { showToast } from "~/components/ui/toast";
import type { EnsembleRow } from "~/lib/views";
import type { ActAnswer } from "./ensemble-acts";

/**
 * Deletes at once and offers to take it back, as every act that takes something away. It belongs to the page: the row
 * is gone by the time somebody says Undo.
 */
export function useDeletion(team: string) {
  const removing = useFetcher<ActAnswer>();
  const restoring = useFetcher<ActAnswer>();
  const last = useRef<EnsembleRow | null>(null);
  // Several may be deleted before the first Undo: each toast brings its own one back.
  const comingBack = useRef("");
  const told = useRef<ActAnswer | undefined>(undefined);
  const action = `${href("/teams/:team", { team })}?index`;

  const { data } = removing;
  const { submit: restore } = restoring;
  useEffect(() => {
    const row = last.current;
    if (!data || told.current === data || !row) return;
    told.current = data;
    if (data.ok) {
      // The button that had the focus goes with its row.
      document.getElementById("content")?.focus({ preventScroll: true });
      showToast({
        tone: "done",
        text: `${row.name} deleted.`,
        action: {
          label: "Undo",
          act: () => {
            comingBack.current = row.name;
            restore({ intent: "restore", ensemble: row.id }, { method: "post", action });
          },
        },
      });
    } else showToast({ tone: "failed", text: data.message ?? "Not deleted." });
  }, [data, restore, action]);

  const back = restoring.data;
  useEffect(() => {
    if (!back) return;
    if (back.ok) showToast({ tone: "done", text: `${comingBack.current} is back.` });
    else showToast({ tone: "failed", text: back.message ?? "Not restored." });
  }, [back]);

  return (row: EnsembleRow) => {
    last.current = row;
    removing.submit({ intent: "delete", ensemble: row.id }, { method: "post", action });
  };
}
