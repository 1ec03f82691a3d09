import type { ReactNode } from "react";

/** Title of a section, or of a whole page, with what stands at its right ("How this is computed"). */
export function SectionHead({
  title,
  aside,
  id,
  page = false,
}: {
  title: ReactNode;
  aside?: ReactNode;
  id?: string;
  page?: boolean;
}) {
  const Head = page ? "h1" : "h2";
  return (
    <div className="flex flex-wrap items-baseline justify-between gap-x-4 gap-y-1">
      <Head id={id} className="text-lg font-semibold tracking-title break-words sm:text-xl">
        {title}
      </Head>
      {aside ? (
        <span className="text-xs print:hidden [&_a]:inline-flex [&_a]:min-h-6 [&_a]:items-center pointer-coarse:[&_a]:min-h-11">
          {aside}
        </span>
      ) : null}
    </div>
  );
}

/** The one or two sentences a section opens with: computed, in plain words. `more` says the rest in small. */
export function Finding({ children, more, wide }: { children: ReactNode; more?: ReactNode; wide?: boolean }) {
  return (
    // Takes the focus where an act took away the control that had it.
    <div
      data-finding=""
      tabIndex={-1}
      className={`figures mt-2 outline-none ${wide ? "max-w-[60rem]" : "max-w-[46rem]"}`}
    >
      <p className="text-base text-pretty sm:text-lg">{children}</p>
      {more ? <p className="mt-1 text-ink-2">{more}</p> : null}
    </div>
  );
}

/** Title of a block inside a section, with its buttons. */
export function BlockHead({ title, children, id }: { title: ReactNode; children?: ReactNode; id?: string }) {
  return (
    <div className="mb-2 flex flex-wrap items-center justify-between gap-3">
      <h3 id={id} className="text-sm font-semibold">
        {title}
      </h3>
      {children ? <div className="flex flex-wrap gap-2">{children}</div> : null}
    </div>
  );
}
