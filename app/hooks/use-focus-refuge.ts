import { type FocusEvent, useEffect, useRef } from "react";

/** What is taken out by an act may go a moment after the act: a dialog fades before it leaves. */
const AFTERWARDS_MS = 400;

/**
 * Keeps the place of a reader who works by key. When the control that has the focus leaves the page with its own act (a
 * row that was released, a note that was answered), the focus goes to `refuge`, which says what became of it, instead of
 * to the top of the page.
 *
 * @param refuge the element with tabIndex −1 that takes it
 * @returns for the element around the controls
 */
export function useFocusRefuge(refuge: () => HTMLElement | null | undefined) {
  const find = useRef(refuge);
  find.current = refuge;
  const last = useRef<EventTarget | null>(null);
  useEffect(() => {
    const check = () => {
      const left = last.current instanceof Element && !last.current.isConnected;
      if (!left) return;
      const { activeElement } = document;
      if (activeElement === null || activeElement === document.body) {
        last.current = null;
        find.current()?.focus();
      }
    };
    check();
    const timer = setTimeout(check, AFTERWARDS_MS);
    return () => clearTimeout(timer);
  });
  return (event: FocusEvent) => {
    last.current = event.target;
  };
}
