import {
  createContext,
  type ReactNode,
  useCallback,
  useContext,
  useEffect,
  useMemo,
  useRef,
  useState,
} from "react";
import { href, useFetcher } from "react-router";
import { showToast } from "~/components/ui/toast";
import { formatCount } from "~/lib/format";
import type { ActAnswer } from "./act-answer";

interface Decisions {
  hold: (frame: number, reason: string) => void;
  release: (frame: number, reason: string) => void;
  /** True while one is on its way. */
  pending: boolean;
  /** Why the last one was refused; null where it was not. */
  refusal: string | null;
  /** Counts the decisions that were taken, so that a dialog knows when its own is done. */
  taken: number;
}

const Context = createContext<Decisions | null>(null);

export function useDecisions(): Decisions {
  const decisions = useContext(Context);
  if (decisions === null) throw new Error("A decision is taken outside the workbench.");
  return decisions;
}

/**
 * Holds and releases of frames. They live above the lists: a released frame leaves its list, and Undo must outlive it.
 */
export function DecisionsProvider({ ensembleId, children }: { ensembleId: string; children: ReactNode }) {
  const fetcher = useFetcher<ActAnswer>();
  const { submit, data, state } = fetcher;
  const [taken, setTaken] = useState(0);
  const told = useRef<ActAnswer | undefined>(undefined);
  const decide = useCallback(
    (intent: "hold" | "release", frame: number, reason: string) =>
      void submit(
        { intent, frame: String(frame), reason },
        { method: "post", action: href("/ensembles/:id/intake", { id: ensembleId }) },
      ),
    [submit, ensembleId],
  );
  useEffect(() => {
    if (told.current === data) return;
    told.current = data;
    const done = data?.ok ? data.done : undefined;
    if (!done || done.frame === undefined) return;
    setTaken((count) => count + 1);
    const { frame, reason = "" } = done;
    const held = done.intent === "hold";
    showToast({
      tone: "done",
      badge: held ? "held" : "released",
      text: held
        ? `Frame ${formatCount(frame)} is held and left out of every computation.`
        : `Frame ${formatCount(frame)} takes part again.`,
      action: reason.startsWith(UNDONE)
        ? undefined
        : {
            label: "Undo",
            act: () => decide(held ? "release" : "hold", frame, `${UNDONE}: ${reason}`.slice(0, 500)),
          },
    });
  }, [data, decide]);
  const value = useMemo<Decisions>(
    () => ({
      hold: (frame, reason) => decide("hold", frame, reason),
      release: (frame, reason) => decide("release", frame, reason),
      pending: state !== "idle",
      refusal: data && !data.ok ? (data.message ?? "This was refused.") : null,
      taken,
    }),
    [decide, state, data, taken],
  );
  return <Context value={value}>{children}</Context>;
}

const UNDONE = "Undone";
