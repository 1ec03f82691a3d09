import type { ReactNode } from "react";

const EDGES = {
  plain: "border-rule-2",
  held: "border-held-edge",
  danger: "border-danger-edge",
  good: "border-good-edge",
};

/** Empty, running, failed, not yet: a 3 px rule on top, a title, one sentence, one way on. */
export function StatePanel({
  tone = "plain",
  title,
  children,
  actions,
  level: Heading = "h3",
  className = "",
}: {
  tone?: keyof typeof EDGES;
  title: ReactNode;
  children?: ReactNode;
  actions?: ReactNode;
  /** Of its title: one below the heading it stands under. */
  level?: "h2" | "h3";
  className?: string;
}) {
  return (
    <section className={`border-t-3 pt-4 ${EDGES[tone]} ${className}`}>
      <Heading className="text-sm font-semibold">{title}</Heading>
      {children ? <div className="mt-1 max-w-read text-ink-2">{children}</div> : null}
      {actions ? <div className="mt-4 flex flex-wrap items-center gap-4">{actions}</div> : null}
    </section>
  );
}
