import type { ReactNode } from "react";

export type NoteTone = "plain" | "held" | "remark" | "mark" | "danger" | "good";

const EDGES: Record<NoteTone, string> = {
  plain: "border-rule-2",
  held: "border-held-edge",
  remark: "border-remark-edge",
  mark: "border-mark",
  danger: "border-danger-edge",
  good: "border-good-edge",
};

/** An aside with a 3 px edge of meaning. */
export function Note({
  tone = "plain",
  children,
  className = "",
}: {
  tone?: NoteTone;
  children: ReactNode;
  className?: string;
}) {
  return (
    <div className={`max-w-read border-l-3 py-1 pl-4 text-ink-2 ${EDGES[tone]} ${className}`}>{children}</div>
  );
}
