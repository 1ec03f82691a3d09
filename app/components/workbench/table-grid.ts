import { type KeyboardEvent, useCallback, useRef, useState } from "react";
import { flushSync } from "react-dom";

/** Frames of the screen in which a row that was scrolled to must have come into the page. */
const PATIENCE_FRAMES = 30;

/**
 * One row of a grid takes the focus at a time; arrow, page, Home and End keys walk the rows. A row that is not in the
 * page yet is scrolled to first. The next key counts from where the last one led, whether the row stands already or not.
 */
export function useRowFocus(options: {
  count: number;
  /** Brings a row into the page; called where it is not there yet. */
  scrollTo: (index: number) => void;
  /** Space and Enter; with Shift, rows up to here; with Ctrl or Command, one more. */
  onChoose: (index: number, how: "only" | "add" | "extend") => void;
  page?: number;
}) {
  const { count, scrollTo, onChoose, page = 10 } = options;
  const [active, setActive] = useState(0);
  const body = useRef<HTMLTableSectionElement>(null);
  /** The row that shall have the focus and does not have it yet. */
  const awaited = useRef<number | null>(null);
  const takeFocus = useCallback((left: number) => {
    const index = awaited.current;
    if (index === null) return;
    const row = body.current?.querySelector<HTMLElement>(`[data-row="${index}"]`);
    if (row) {
      awaited.current = null;
      row.focus({ preventScroll: true });
      row.scrollIntoView({ block: "nearest" });
    } else if (left > 0) requestAnimationFrame(() => takeFocus(left - 1));
    else awaited.current = null;
  }, []);
  const focusRow = useCallback(
    (index: number) => {
      const waits = awaited.current !== null;
      awaited.current = index;
      flushSync(() => setActive(index));
      if (!body.current?.querySelector(`[data-row="${index}"]`)) {
        // The row that has the focus may leave the page by the scrolling: the grid keeps it, so that no key is lost.
        body.current?.closest<HTMLElement>("[role=grid]")?.focus({ preventScroll: true });
        scrollTo(index);
        if (waits) return;
      }
      takeFocus(PATIENCE_FRAMES);
    },
    [scrollTo, takeFocus],
  );
  const onKeyDown = (event: KeyboardEvent<HTMLElement>) => {
    const row = (event.target as HTMLElement).closest<HTMLElement>("[data-row]");
    const ofRow = row !== null && event.target === row;
    const now = awaited.current ?? (ofRow ? Number(row.dataset.row) : null);
    if (now === null || !(ofRow || event.target === event.currentTarget)) return;
    const next = {
      ArrowDown: now + 1,
      ArrowUp: now - 1,
      PageDown: now + page,
      PageUp: now - page,
      Home: 0,
      End: count - 1,
    }[event.key];
    if (next !== undefined) {
      event.preventDefault();
      const inside = Math.min(count - 1, Math.max(0, next));
      focusRow(inside);
      if (event.shiftKey && (event.key === "ArrowDown" || event.key === "ArrowUp"))
        onChoose(inside, "extend");
    } else if (event.key === " " || event.key === "Enter") {
      event.preventDefault();
      onChoose(now, event.shiftKey ? "extend" : event.ctrlKey || event.metaKey ? "add" : "only");
    }
  };
  const at = Math.min(active, Math.max(0, count - 1));
  return { active: at, setActive, body, onKeyDown };
}
