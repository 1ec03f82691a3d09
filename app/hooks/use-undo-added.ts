import { useCallback, useEffect } from "react";
import { href, useFetcher } from "react-router";
import { showToast } from "~/components/ui/toast";
import type { ActAnswer } from "~/components/workbench/act-answer";

/** Says that columns were added, with the way back; what is taken back can be brought back at Columns. */
export function useUndoAdded(ensembleId: string): (columns: readonly { id: string }[], text: string) => void {
  const { submit, data } = useFetcher<ActAnswer>();
  useEffect(() => {
    if (data && data.ok !== true) showToast({ tone: "failed", text: data.message ?? "Nothing was undone." });
  }, [data]);
  return useCallback(
    (columns, text) => {
      const form = new FormData();
      form.set("intent", "remove-added");
      for (const { id } of columns) form.append("column", id);
      const act = () => {
        void submit(form, { method: "post", action: href("/ensembles/:id/columns", { id: ensembleId }) });
      };
      showToast({ tone: "done", text, action: { label: "Undo", act } });
    },
    [submit, ensembleId],
  );
}
