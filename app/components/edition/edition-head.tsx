import type { ReactNode } from "react";

/** Title of a part of an edition. */
export function EditionHead({ id, children }: { id?: string; children: ReactNode }) {
  return (
    <h2 id={id} className="text-base font-semibold tracking-title">
      {children}
    </h2>
  );
}
