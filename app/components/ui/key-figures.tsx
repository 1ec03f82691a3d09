import type { ReactNode } from "react";
import { Provenance, type Source } from "./provenance";

/** A row of figures between hairlines: five wide, three at 1024, two on a phone. */
export function KeyFigures({ children }: { children: ReactNode }) {
  return (
    <dl className="mt-6 grid grid-cols-2 gap-y-4 sm:grid-cols-3 xl:grid-cols-5 [&>div]:border-l [&>div]:border-rule [&>div]:px-4 max-sm:[&>div:nth-child(odd)]:border-l-0 max-sm:[&>div:nth-child(odd)]:pl-0 sm:max-xl:[&>div:nth-child(3n+1)]:border-l-0 sm:max-xl:[&>div:nth-child(3n+1)]:pl-0 xl:[&>div:nth-child(5n+1)]:border-l-0 xl:[&>div:nth-child(5n+1)]:pl-0">
      {children}
    </dl>
  );
}

/** One figure with its unit; `source` says where the number comes from. */
export function KeyFigure({
  label,
  value,
  unit,
  tone,
  source,
}: {
  label: ReactNode;
  value: ReactNode;
  unit?: ReactNode;
  tone?: "held" | "remark";
  source?: Source;
}) {
  const colour = tone === "held" ? "text-held" : tone === "remark" ? "text-remark" : "text-ink";
  return (
    <div data-figure="">
      <dt className="text-xs font-medium text-ink-3">{label}</dt>
      <dd className={`figures text-lg font-medium tracking-title whitespace-nowrap sm:text-xl ${colour}`}>
        {source ? <Provenance {...source}>{value}</Provenance> : value}
        {unit ? <span className="ml-1 text-xs font-normal tracking-normal text-ink-3">{unit}</span> : null}
      </dd>
    </div>
  );
}
