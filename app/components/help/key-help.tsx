import { useEffect, useState } from "react";
import { href, Link } from "react-router";
import { Dialog } from "~/components/ui/dialog";
import { linkClass } from "~/components/ui/text-link";
import { type KeyGroup, keysInForce } from "~/lib/help/keys";
import { KeyList } from "./key-list";
import { KeySwitch, useKeysOn } from "./key-switch";

/** Where a character is text: no key of ours acts there. */
const TYPED_IN = "input, textarea, select, [contenteditable]";

function isOurs(event: KeyboardEvent): boolean {
  if (event.key !== "?" || event.defaultPrevented || event.ctrlKey || event.metaKey || event.altKey) {
    return false;
  }
  if (event.target instanceof Element && event.target.closest(TYPED_IN)) return false;
  return document.querySelector("[role=dialog], [role=alertdialog]") === null;
}

/** `?` lists the keys in force on the page at hand; Escape closes the list. */
export function KeyHelp() {
  const on = useKeysOn();
  const [groups, setGroups] = useState<KeyGroup[] | null>(null);
  useEffect(() => {
    if (!on) return;
    const listen = (event: KeyboardEvent) => {
      if (!isOurs(event)) return;
      event.preventDefault();
      setGroups(keysInForce((selector) => document.querySelector(selector) !== null));
    };
    window.addEventListener("keydown", listen);
    return () => window.removeEventListener("keydown", listen);
  }, [on]);
  return (
    <Dialog
      reading
      open={groups !== null}
      onOpenChange={(open) => {
        if (!open) setGroups(null);
      }}
      title="Keys on this page"
      description="Each acts where the focus is; Tab leads there."
    >
      <KeyList groups={groups ?? []} />
      <div className="grid gap-3 border-t border-rule pt-4">
        <KeySwitch />
        <Link className={linkClass} to={href("/words")} onClick={() => setGroups(null)}>
          Words and keys
        </Link>
      </div>
    </Dialog>
  );
}
