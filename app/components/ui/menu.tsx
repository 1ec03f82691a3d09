import { DropdownMenu } from "radix-ui";
import type { ReactNode } from "react";

const itemClass =
  "flex min-h-9 cursor-pointer items-center gap-2 rounded-sm px-3 text-sm outline-none select-none data-highlighted:bg-sunk pointer-coarse:min-h-11 data-disabled:text-ink-off [&_svg]:size-4";

/** A list of acts behind a button: arrow keys, letters, Escape. `trigger` is the button. */
export function Menu({
  trigger,
  label,
  children,
}: {
  trigger: ReactNode;
  label: string;
  children: ReactNode;
}) {
  return (
    <DropdownMenu.Root modal={false}>
      <DropdownMenu.Trigger asChild>{trigger}</DropdownMenu.Trigger>
      <DropdownMenu.Portal>
        <DropdownMenu.Content
          aria-label={label}
          align="end"
          sideOffset={4}
          collisionPadding={16}
          className="z-40 min-w-44 rounded-md border border-rule-2 bg-sheet p-1 text-ink shadow-float"
        >
          {children}
        </DropdownMenu.Content>
      </DropdownMenu.Portal>
    </DropdownMenu.Root>
  );
}

/** One act. `stop` for what takes something away. */
export function MenuItem({
  onSelect,
  tone = "plain",
  disabled,
  children,
}: {
  onSelect: () => void;
  tone?: "plain" | "stop";
  disabled?: boolean;
  children: ReactNode;
}) {
  return (
    <DropdownMenu.Item
      onSelect={onSelect}
      disabled={disabled}
      className={`${itemClass} ${tone === "stop" ? "text-danger" : ""}`}
    >
      {children}
    </DropdownMenu.Item>
  );
}

export function MenuRule() {
  return <DropdownMenu.Separator className="my-1 border-t border-rule" />;
}
