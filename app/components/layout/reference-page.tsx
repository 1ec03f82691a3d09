import type { ReactNode } from "react";
import { linkClass } from "~/components/ui/text-link";
import { pageClass } from "./app-shell";

export interface ReferenceSection {
  id: string;
  title: ReactNode;
  /** In the list at the left, where the title is more than words. */
  name?: string;
  body: ReactNode;
}

/** A page to look things up in: its sections as a list at the left, text in a readable measure. */
export function ReferencePage({
  title,
  lead,
  sections,
}: {
  title: string;
  lead: ReactNode;
  sections: readonly ReferenceSection[];
}) {
  return (
    <div className={`pt-8 pb-16 max-sm:pt-4 ${pageClass}`}>
      <div className="grid grid-cols-[minmax(0,1fr)] gap-x-12 lg:grid-cols-[16rem_minmax(0,1fr)]">
        <div className="lg:col-start-2">
          <h1 className="text-lg font-semibold tracking-title sm:text-2xl">{title}</h1>
          <p className="mt-2 max-w-[46rem] text-base text-pretty text-ink-2 sm:text-lg">{lead}</p>
        </div>
        <nav
          aria-label="On this page"
          className="mt-6 self-start lg:sticky lg:top-6 lg:col-start-1 lg:row-span-2 lg:row-start-1 lg:mt-0"
        >
          <ul className="flex flex-wrap gap-x-4 gap-y-1 lg:grid lg:gap-0">
            {sections.map(({ id, title, name = title }) => (
              <li key={id} className="lg:border-b lg:border-rule">
                <a
                  href={`#${id}`}
                  className="block py-1 text-link underline decoration-1 underline-offset-3 lg:py-2 lg:text-ink-2 lg:no-underline lg:hover:underline"
                >
                  {name}
                </a>
              </li>
            ))}
          </ul>
        </nav>
        <div className="lg:col-start-2">
          {sections.map((section) => (
            <section
              key={section.id}
              id={section.id}
              aria-labelledby={`${section.id}-title`}
              className="mt-12"
            >
              <h2
                id={`${section.id}-title`}
                className="border-b border-rule-2 pb-2 text-base font-semibold sm:text-lg"
              >
                {section.title}
              </h2>
              <div className="mt-4 grid max-w-read grid-cols-[minmax(0,1fr)] gap-3 text-base [overflow-wrap:anywhere] max-sm:[&_table]:text-xs max-sm:[&_td]:px-1 max-sm:[&_th]:px-1 [&>ul]:grid [&>ul]:list-disc [&>ul]:gap-2 [&>ul]:pl-6">
                {section.body}
              </div>
            </section>
          ))}
        </div>
      </div>
    </div>
  );
}

/** A formula on its own line. */
export function FormulaLine({ children }: { children: ReactNode }) {
  return <p className="figures rounded-sm bg-sunk px-4 py-2">{children}</p>;
}

/** A source: journal, year, volume, page. `remembered` ones were not looked up when this was written. */
export function Cite({ children, remembered = false }: { children: ReactNode; remembered?: boolean }) {
  return (
    <cite className="text-sm text-ink-3 not-italic">
      [{children}
      {remembered ? "; from memory" : ""}]
    </cite>
  );
}

/** Link to another section of a reference page. */
export function SectionLink({ to, children }: { to: string; children: ReactNode }) {
  return (
    <a href={to} className={linkClass}>
      {children}
    </a>
  );
}
