import { useCallback, useRef, useState } from "react";

export interface Held<Value> {
  /** What is moved while something is, else what the address says. */
  shown: Value;
  /** Shows a value that the address does not know yet. */
  hold: (value: Value) => void;
  /** To be called beside every change of the address to this value. */
  sent: (value: Value) => void;
}

/** What is held over the value, and which values are on their way into the address, oldest first. */
interface Hold<Value> {
  draft: { value: Value } | null;
  sent: readonly Value[];
  seen: Value;
}

/**
 * What stands after the address has come to say `value`: a value of our own on its way in leaves a newer draft alone; any
 * other means that the reader went back or on, which ends what was being moved.
 *
 * @example followed({ draft: { value: 300 }, sent: [299], seen: 298 }, 299).draft // { value: 300 }
 */
export function followed<Value>(hold: Hold<Value>, value: Value): Hold<Value> {
  const place = hold.sent.lastIndexOf(value);
  const arrived = place >= 0;
  const draft = arrived && hold.draft?.value !== value ? hold.draft : null;
  return { draft, sent: arrived ? hold.sent.slice(place + 1) : [], seen: value };
}

/** Holds what a thumb was moved to until the address says the same, so that it never jumps back in between. */
export function useHeld<Value>(value: Value): Held<Value> {
  const [hold, setHold] = useState<Hold<Value>>({ draft: null, sent: [], seen: value });
  let now = hold;
  if (!Object.is(hold.seen, value)) {
    now = followed(hold, value);
    setHold(now);
  }
  const latest = useRef(value);
  latest.current = value;
  return {
    shown: now.draft === null ? value : now.draft.value,
    hold: useCallback((next: Value) => setHold((one) => ({ ...one, draft: { value: next } })), []),
    sent: useCallback(
      (next: Value) =>
        setHold((one) =>
          // What the address says already will never arrive.
          Object.is(next, latest.current) && one.sent.length === 0
            ? { ...one, draft: null }
            : { ...one, sent: [...one.sent, next] },
        ),
      [],
    ),
  };
}
