import { X } from "lucide-react";
import { type ReactNode, useEffect, useRef, useState, useSyncExternalStore } from "react";
import { Badge } from "./badge";
import { IconButton } from "./button";
import { TextButton } from "./text-link";

export interface ToastWords {
  /** `failed` stays until it is closed. */
  tone: "done" | "failed";
  /** One sentence. */
  text: ReactNode;
  /** Word in the badge where "done" or "failed" says too little. */
  badge?: string;
  /** "Undo" or "Try again". */
  action?: { label: string; act: () => void };
}

interface Toast extends ToastWords {
  id: number;
}

const SHOWN_MS = 8000;
let toasts: readonly Toast[] = [];
let nextId = 1;
const listeners = new Set<() => void>();

function set(next: readonly Toast[]) {
  toasts = next;
  for (const tell of listeners) tell();
}

/** Shows one line at the bottom left. Any component may call it; `<Toasts />` in the shell draws it. */
export function showToast(words: ToastWords): void {
  // Three at most: older ones would push each other off a phone.
  set([...toasts.slice(-2), { ...words, id: nextId++ }]);
}

function dismiss(id: number): void {
  set(toasts.filter((toast) => toast.id !== id));
}

const NONE: readonly Toast[] = [];

/** The place where toasts stand; once in the shell. Both regions are there from the start, so that readers announce them. */
export function Toasts() {
  const all = useSyncExternalStore(
    (tell) => {
      listeners.add(tell);
      return () => listeners.delete(tell);
    },
    () => toasts,
    () => NONE,
  );
  return (
    <div className="pointer-events-none fixed bottom-4 left-4 z-50 grid max-w-[calc(100vw-2rem)] gap-2 print:hidden [&>*>*]:pointer-events-auto">
      <div role="alert" className="grid justify-items-start gap-2">
        {all.map((toast) => (toast.tone === "failed" ? <Line key={toast.id} toast={toast} /> : null))}
      </div>
      <div role="status" className="grid justify-items-start gap-2">
        {all.map((toast) => (toast.tone === "done" ? <Line key={toast.id} toast={toast} /> : null))}
      </div>
    </div>
  );
}

function Line({ toast }: { toast: Toast }) {
  const [paused, setPaused] = useState(false);
  const root = useRef<HTMLDivElement>(null);
  useEffect(() => {
    if (paused || toast.tone === "failed") return;
    const timer = setTimeout(() => dismiss(toast.id), SHOWN_MS);
    return () => clearTimeout(timer);
  }, [paused, toast]);
  return (
    // biome-ignore lint/a11y/noStaticElementInteractions: the pointer only holds the clock; nothing is done by it
    <div
      ref={root}
      className="flex flex-wrap items-center gap-3 rounded-md border border-rule-2 bg-sheet py-2 pr-2 pl-4 shadow-float"
      onPointerEnter={() => setPaused(true)}
      onPointerLeave={() => setPaused(false)}
      onFocus={() => setPaused(true)}
      onBlur={() => setPaused(false)}
      onKeyDown={(event) => event.key === "Escape" && dismiss(toast.id)}
    >
      <Badge tone={toast.tone === "done" ? "good" : "danger"}>{toast.badge ?? toast.tone}</Badge>
      <span>{toast.text}</span>
      {toast.action ? (
        <TextButton
          onClick={() => {
            toast.action?.act();
            dismiss(toast.id);
          }}
        >
          {toast.action.label}
        </TextButton>
      ) : null}
      <IconButton label="Dismiss" onClick={() => dismiss(toast.id)}>
        <X aria-hidden="true" />
      </IconButton>
    </div>
  );
}
