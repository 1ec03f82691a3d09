import type { ReactNode } from "react";

/**
 * The settings of a section, between two rules. Widths are the section's own: `columns` is a grid template class. On
 * paper, and where no script moves them, `words` say what they are set to.
 */
export function SettingsStrip({
  columns,
  words,
  children,
}: {
  columns: string;
  words?: ReactNode;
  children: ReactNode;
}) {
  return (
    <>
      <div
        className={`mt-6 grid items-start gap-x-6 gap-y-4 border-y border-rule py-4 noscript:hidden print:hidden ${columns}`}
      >
        {children}
      </div>
      {words ? <p className="figures mt-4 hidden text-ink-2 noscript:block print:block">{words}</p> : null}
    </>
  );
}
