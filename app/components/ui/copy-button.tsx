import { type ReactNode, useState } from "react";
import { Button, type ButtonKind, type ButtonSize } from "./button";
import { TextButton } from "./text-link";

/** Puts `text` on the clipboard and says that it did, in place and for screen readers. */
export function CopyButton({
  text,
  children,
  as = "button",
  kind,
  size = "sm",
}: {
  text: string;
  children: ReactNode;
  as?: "button" | "link";
  kind?: ButtonKind;
  size?: ButtonSize;
}) {
  const [state, setState] = useState<"idle" | "copied" | "refused">("idle");
  const copy = async () => {
    try {
      await navigator.clipboard.writeText(text);
      setState("copied");
    } catch {
      // No permission, or no secure context: the text stays on the page to be marked by hand.
      setState("refused");
    }
  };
  const words = state === "idle" ? children : state === "copied" ? "Copied" : "Mark and copy by hand";
  const shared = { onClick: copy, onBlur: () => setState("idle") };
  return (
    <>
      {as === "button" ? (
        <Button kind={kind} size={size} {...shared}>
          {words}
        </Button>
      ) : (
        <TextButton {...shared}>{words}</TextButton>
      )}
      <span role="status" className="sr-only">
        {state === "copied" ? "Copied" : ""}
      </span>
    </>
  );
}
