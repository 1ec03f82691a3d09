import type { ComponentProps } from "react";
import { Link, type LinkProps } from "react-router";

export const linkClass = "text-link underline decoration-1 underline-offset-3 hover:decoration-2";

/** A link in running text: always underlined. */
export function TextLink({ className = "", ...rest }: LinkProps) {
  return <Link className={`${linkClass} ${className}`} {...rest} />;
}

/** Looks like a link and acts in place: "Show", "Cancel", "Copy". */
export function TextButton({ className = "", type = "button", ...rest }: ComponentProps<"button">) {
  return <button type={type} className={`${linkClass} ${className}`} {...rest} />;
}
