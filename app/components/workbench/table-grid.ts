import { type KeyboardEvent, useCallback, useRef, useState } from "react";

/**
 * One row of a grid takes the focus at a time; arrow, page, Home and End keys walk the rows. A row that is not in the
 * page yet is scrolled to first.
 */
export function useRowFocus(options: {
  count: number;
  scrollTo: (index: number) => void;
  /** Space and Enter; with Shift, rows up to here; with Ctrl or Command, one more. */
  onChoose: (index: number, how: "only" | "add" | "extend") => void;
  page?: number;
}) {
  const { count, scrollTo, onChoose, page = 10 } = options;
  const [active, setActive] = useState(0);
  const body = useRef<HTMLTableSectionElement>(null);
  const focusRow = useCallback(
    (index: number) => {
      setActive(index);
      scrollTo(index);
      // The row may first have to be rendered by the scrolling.
      requestAnimationFrame(() =>
        requestAnimationFrame(() =>
          body.current?.querySelector<HTMLElement>(`[data-row="${index}"]`)?.focus({ preventScroll: true }),
        ),
      );
    },
    [scrollTo],
  );
  const onKeyDown = (event: KeyboardEvent<HTMLElement>) => {
    const row = (event.target as HTMLElement).closest<HTMLElement>("[data-row]");
    if (row === null || event.target !== row) return;
    const now = Number(row.dataset.row);
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
