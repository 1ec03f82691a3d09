import type { ReactNode } from "react";

/** The settings of a section, between two rules. Widths are the section's own: `columns` is a grid template class. */
export function SettingsStrip({ columns, children }: { columns: string; children: ReactNode }) {
  return (
    <div className={`mt-6 grid items-start gap-x-6 gap-y-4 border-y border-rule py-4 ${columns}`}>
      {children}
    </div>
  );
}
