import type { ReactNode } from "react";
import { Brand } from "./brand";

const RULES = { plain: "border-rule-2", held: "border-held-edge", danger: "border-danger-edge" };

/**
 * A door (sign in, join, reset) or a closed way: one column of 360, 48 from the bar, one primary button, in the foot
 * the one thing to know. Closed ways carry the 3 px rule of their state above the title.
 */
export function Door({
  title,
  rule,
  lead,
  foot,
  children,
}: {
  title: ReactNode;
  rule?: keyof typeof RULES;
  lead?: ReactNode;
  foot?: ReactNode;
  children?: ReactNode;
}) {
  return (
    <div className="flex min-h-dvh flex-col">
      <header className="h-13 border-b border-rule">
        <div className="flex h-full items-center px-4 sm:px-6 xl:px-8">
          <Brand />
        </div>
      </header>
      <main className="mx-auto w-full max-w-[24.5rem] flex-1 px-4 pt-12 pb-16">
        <div className="grid gap-4">
          <div className="grid gap-2">
            <h1
              className={`text-lg font-semibold tracking-title sm:text-xl ${rule ? `border-t-3 pt-6 ${RULES[rule]}` : ""}`}
            >
              {title}
            </h1>
            {lead ? <p className="figures text-base text-ink-2">{lead}</p> : null}
          </div>
          {children}
        </div>
      </main>
      {foot ? (
        <footer className="border-t border-rule text-xs text-ink-3">
          <div className="px-4 py-4 sm:px-6 xl:px-8">{foot}</div>
        </footer>
      ) : null}
    </div>
  );
}

/** What stands below the button of a door, after a hairline. */
export function DoorAside({ children }: { children: ReactNode }) {
  return <p className="mt-2 border-t border-rule pt-4 text-ink-2">{children}</p>;
}
