import type { ComponentProps } from "react";
import { Link, type LinkProps } from "react-router";
import { scriptOnly } from "./button";

export const linkClass = "text-link underline decoration-1 underline-offset-3 hover:decoration-2";

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
  return <button type={type} className={`${linkClass} ${shown} ${className}`} {...rest} />;
}
