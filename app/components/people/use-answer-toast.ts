import { useEffect } from "react";
import { showToast } from "~/components/ui/toast";
import type { PeopleAnswer } from "~/routes/team/people";

/** Says what became of an act in a row. */
export function useAnswerToast(data: PeopleAnswer | undefined, idle: boolean): void {
  useEffect(() => {
    if (!idle || data === undefined) return;
    if (data.ok && data.done) showToast({ tone: "done", badge: "done", text: data.done });
    else if (data.message) showToast({ tone: "failed", text: data.message });
  }, [data, idle]);
}
