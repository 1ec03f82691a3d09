import type { ComponentProps, ReactNode } from "react";
import { Link, type LinkProps, useNavigation } from "react-router";

export type ButtonKind = "primary" | "plain" | "quiet" | "stop";
export type ButtonSize = "md" | "sm";

interface Look {
  /** One primary a page; question cards may have their own. */
  kind?: ButtonKind;
  /** 36 px, or 28 px in heads of tables; 44 px where the pointer is coarse. */
  size?: ButtonSize;
  icon?: ReactNode;
  /** Takes the whole width of its column. */
  wide?: boolean;
}

const BASE =
  "inline-flex items-center justify-center gap-2 rounded-md border font-medium whitespace-nowrap no-underline print:hidden " +
  "transition-colors duration-(--duration-quick) disabled:border-rule-2 disabled:bg-transparent disabled:text-ink-off " +
  "aria-disabled:border-rule-2 aria-disabled:bg-transparent aria-disabled:text-ink-off [&_svg]:size-4 [&_svg]:shrink-0";

const KINDS: Record<ButtonKind, string> = {
  primary: "border-action bg-action text-on-action hover:border-action-over hover:bg-action-over",
  plain: "border-edge bg-sheet text-ink hover:bg-sunk",
  quiet: "border-transparent text-link hover:bg-sunk",
  stop: "border-danger-edge bg-sheet text-danger hover:bg-danger-ground",
};

/** A button that only script answers is not shown where there is none. */
export const scriptOnly = (type: ComponentProps<"button">["type"]) =>
  type === "button" ? "noscript:hidden" : "";

/** The classes of a button, for an element that cannot be one of the components below (a label, a summary). */
export function buttonClass({ kind = "plain", size = "md", wide = false }: Look = {}): string {
  const height =
    size === "md"
      ? "h-9 max-sm:h-11 pointer-coarse:h-11 text-sm"
      : "h-7 max-sm:h-9 pointer-coarse:h-11 text-sm";
  const side = kind === "quiet" ? "px-2" : size === "md" ? "px-4" : "px-3";
  return `${BASE} ${KINDS[kind]} ${height} ${side}${wide ? " w-full" : ""}`;
}

/** A button; `type="submit"` has to be said. The label names the act and its object: "Freeze edition 3". */
export function Button({
  kind,
  size,
  icon,
  wide,
  className = "",
  type = "button",
  children,
  ...rest
}: Look & ComponentProps<"button">) {
  return (
    <button
      type={type}
      className={`${buttonClass({ kind, size, wide })} ${scriptOnly(type)} ${className}`}
      {...rest}
    >
      {icon}
      {children}
    </button>
  );
}

/** A link that looks like a button. With `reloadDocument` it also fetches files. */
export function ButtonLink({ kind, size, icon, wide, className = "", children, ...rest }: Look & LinkProps) {
  return (
    <Link className={`${buttonClass({ kind, size, wide })} ${className}`} {...rest}>
      {icon}
      {children}
    </Link>
  );
}

/**
 * Sends its form, and says so while it is under way. With `action` it watches only that address; forms of a fetcher
 * pass `pending` instead.
 */
export function SubmitButton({
  kind = "primary",
  pending,
  pendingLabel,
  action,
  children,
  ...rest
}: Look & ComponentProps<"button"> & { pending?: boolean; pendingLabel?: string; action?: string }) {
  const navigation = useNavigation();
  const sending = navigation.state !== "idle" && navigation.formMethod === "POST";
  const busy = pending ?? (sending && (action === undefined || navigation.formAction === action));
  return (
    <Button type="submit" kind={kind} aria-busy={busy || undefined} {...rest}>
      {busy && pendingLabel ? pendingLabel : children}
    </Button>
  );
}

/** A 28 px square with a picture; `label` is its name for everybody who does not see the picture. */
export function IconButton({
  label,
  className = "",
  type = "button",
  children,
  ...rest
}: ComponentProps<"button"> & { label: string }) {
  return (
    <button
      type={type}
      aria-label={label}
      title={label}
      className={`${scriptOnly(type)} inline-grid size-7 shrink-0 place-items-center print:hidden rounded-md border border-transparent text-ink-2 hover:bg-sunk hover:text-ink aria-pressed:border-edge aria-pressed:text-ink pointer-coarse:size-11 [&_svg]:size-4 ${className}`}
      {...rest}
    >
      {children}
    </button>
  );
}
