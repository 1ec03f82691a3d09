import { href, Link } from "react-router";

/** The mark: an energy curve, its lowest basin filled to a level, the lowest conformer in it. */
export function BrandMark() {
  return (
    <svg width="26" height="20" viewBox="0 0 26 20" aria-hidden="true" className="shrink-0">
      <path
        d="M1 3.5C4 3.5 4.5 8 6.5 8S9 5.5 11 7s1.5 9.5 5 9.5S20.5 3.5 25 3.5"
        fill="none"
        stroke="currentColor"
        strokeWidth="1.6"
        strokeLinecap="round"
      />
      <path d="M10.8 11.5h9.7" stroke="currentColor" opacity=".55" />
      <circle cx="16" cy="14" r="1.9" className="fill-mark" />
    </svg>
  );
}

/** Mark and name, the way home. On phones the name makes room for the breadcrumb where there is one. */
export function Brand({ short = false }: { short?: boolean }) {
  return (
    <Link
      to={href("/")}
      className="-mx-2 flex h-11 items-center gap-2 rounded-sm px-2 text-base font-semibold text-ink no-underline"
    >
      <BrandMark />
      <span className={short ? "max-sm:sr-only" : ""}>Lowlying</span>
    </Link>
  );
}
