import type { ReactNode } from "react";

/** Two columns: what, and how it is. Between hairlines where `ruled`. */
export function Facts({
  facts,
  ruled = false,
}: {
  facts: readonly { label: string; value: ReactNode }[];
  ruled?: boolean;
}) {
  return (
    <dl
      className={`figures grid grid-cols-[auto_minmax(0,1fr)] gap-x-4 gap-y-2 ${ruled ? "border-y border-rule py-3" : ""}`}
    >
      {facts.map((fact) => (
        <div key={fact.label} className="contents">
          <dt className="text-ink-3">{fact.label}</dt>
          <dd className="min-w-0 break-words">{fact.value}</dd>
        </div>
      ))}
    </dl>
  );
}
