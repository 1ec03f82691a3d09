import { useSyncExternalStore } from "react";
import { Checkbox } from "~/components/ui/checkbox";
import { KEYS_COOKIE, KEYS_OFF, keysAreOn } from "~/lib/help/keys";

const YEAR_SECONDS = 31_536_000;
const listeners = new Set<() => void>();

const subscribe = (listener: () => void) => {
  listeners.add(listener);
  return () => listeners.delete(listener);
};

function choose(on: boolean): void {
  const life = on ? 0 : YEAR_SECONDS;
  // biome-ignore lint/suspicious/noDocumentCookie: a choice of this browser that the server never needs
  document.cookie = `${KEYS_COOKIE}=${KEYS_OFF}; Path=/; Max-Age=${life}; SameSite=Lax`;
  for (const listener of listeners) listener();
}

/** Whether `?` opens the list of keys in this browser. */
export function useKeysOn(): boolean {
  return useSyncExternalStore(
    subscribe,
    () => keysAreOn(document.cookie),
    () => true,
  );
}

/** Switches `?` off and on: a key without a modifier may be in somebody's way. */
export function KeySwitch() {
  const on = useKeysOn();
  return (
    <Checkbox checked={on} onChange={(event) => choose(event.currentTarget.checked)}>
      The key <kbd className="font-sans font-medium">?</kbd> opens the list of keys
    </Checkbox>
  );
}
