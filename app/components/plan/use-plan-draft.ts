import { useCallback, useEffect, useState } from "react";
import { z } from "zod";
import { alignPlans } from "~/lib/plan/chain";
import { type PlanSet, planSetSchema } from "~/lib/plan/plan";
import type { OpenPlan } from "./save-plan";

const draftSchema = z.object({
  set: planSetSchema,
  open: z.object({ id: z.string(), name: z.string(), version: z.number() }).nullable(),
});

/** The plan at hand, and the stored one that it came from. */
export interface PlanDraft {
  set: PlanSet;
  open: OpenPlan | null;
}

/**
 * The plan somebody works on. What is not saved is kept in this tab of the browser, through reloads and other sections;
 * signing out clears it.
 *
 * @param start what is shown where there is no draft
 */
export function usePlanDraft(
  ensembleId: string,
  start: () => PlanDraft,
): {
  draft: PlanDraft;
  /** True while it differs from what is stored. */
  unsaved: boolean;
  edit(set: PlanSet): void;
  /** Shows a stored plan, a fresh one, or one that was put aside unsaved; what is not saved now is gone. */
  show(next: PlanDraft, unsaved?: boolean): void;
} {
  const key = `plan ${ensembleId}`;
  const [draft, setDraft] = useState(start);
  const [unsaved, setUnsaved] = useState(false);
  useEffect(() => {
    const kept = readDraft(key);
    if (kept === null) return;
    setDraft(kept);
    setUnsaved(true);
  }, [key]);
  const { open } = draft;
  const edit = useCallback(
    (set: PlanSet) => {
      const next = { set, open: open && { id: open.id, name: open.name, version: open.version } };
      keepDraft(key, next);
      setUnsaved(true);
      setDraft(next);
    },
    [key, open],
  );
  const show = useCallback(
    (next: PlanDraft, unsaved = false) => {
      keepDraft(key, unsaved ? next : null);
      setUnsaved(unsaved);
      setDraft(next);
    },
    [key],
  );
  return { draft, unsaved, edit, show };
}

function readDraft(key: string): PlanDraft | null {
  try {
    const text = window.sessionStorage.getItem(key);
    const read = draftSchema.safeParse(text === null ? null : JSON.parse(text));
    return read.success ? { ...read.data, set: alignPlans(read.data.set) } : null;
  } catch {
    // A browser that keeps nothing, or a text that is no draft.
    return null;
  }
}

function keepDraft(key: string, draft: PlanDraft | null): void {
  try {
    if (draft === null) window.sessionStorage.removeItem(key);
    else window.sessionStorage.setItem(key, JSON.stringify(draft));
  } catch {
    // A browser that keeps nothing: the draft lasts as long as the page.
  }
}
