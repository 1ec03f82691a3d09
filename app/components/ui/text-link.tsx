import type { ComponentProps } from "react";
import { Link, type LinkProps } from "react-router";
import { scriptOnly } from "./button";

export const linkClass = "text-link underline decoration-1 underline-offset-3 hover:decoration-2";

/** Words that stand by themselves as a control: targets of 24 px, 44 where the pointer is coarse. */
export const targetClass =
  "inline-flex min-h-6 min-w-6 items-center pointer-coarse:min-h-11 pointer-coarse:min-w-11";

/** A link in running text: always underlined. */
export function TextLink({ className = "", ...rest }: LinkProps) {
  return <Link className={`${linkClass} ${className}`} {...rest} />;
}

/** Looks like a link and acts in place: "Show", "Cancel", "Copy". `printed` ones carry words that paper keeps. */
export function TextButton({
  className = "",
  type = "button",
  printed = false,
  ...rest
}: ComponentProps<"button"> & { printed?: boolean }) {
  const shown = printed ? "print:text-ink print:no-underline" : `print:hidden ${scriptOnly(type)}`;
  return <button type={type} className={`${linkClass} ${targetClass} ${shown} ${className}`} {...rest} />;
}
