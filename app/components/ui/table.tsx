import type { ComponentProps, ReactNode } from "react";
import { Link } from "react-router";

export type SortDirection = "up" | "down";

/** Rules only. Give it an `aria-label` or a caption. */
export function Table({ className = "", ...rest }: ComponentProps<"table">) {
  return <table className={`w-full border-collapse ${className}`} {...rest} />;
}

interface HeadProps {
  /** Second line: the unit. */
  unit?: ReactNode;
  align?: "left" | "right" | "center";
  /** Direction where the table is sorted by this column; null where it could be. */
  sort?: SortDirection | null;
  /** Sorts in place. */
  onSort?: () => void;
  /** Sorts by address: works without script. With `onSort` that is done where there is script. */
  sortTo?: string;
  className?: string;
  children?: ReactNode;
}

const ALIGN = { left: "text-left", right: "text-right", center: "text-center" };

/** Head of a column: 12 px, unit on its second line, the sorted one in ink with an arrow. */
export function Th({ unit, align = "left", sort, onSort, sortTo, className = "", children }: HeadProps) {
  // `aria-sort` says it to those who do not see the arrow.
  const arrow =
    sort === "up" || sort === "down" ? <span aria-hidden="true">{sort === "up" ? " ↑" : " ↓"}</span> : null;
  const sorted = sort === "up" || sort === "down";
  const words = (
    <>
      {children}
      {unit === undefined ? arrow : null}
      {unit === undefined ? null : (
        <span className="block font-normal">
          {unit}
          {arrow}
        </span>
      )}
    </>
  );
  const actClass = `-my-1 inline-block rounded-sm py-1 text-inherit no-underline hover:text-ink pointer-coarse:-my-3 pointer-coarse:py-3 ${ALIGN[align]}`;
  return (
    <th
      scope="col"
      aria-sort={
        sort === undefined ? undefined : sort === "up" ? "ascending" : sort === "down" ? "descending" : "none"
      }
      className={`border-t border-b border-t-rule border-b-rule-2 px-3 py-2 align-bottom text-xs font-medium whitespace-nowrap max-sm:px-2 max-[24rem]:px-1 ${sorted ? "text-ink" : "text-ink-3"} ${ALIGN[align]} ${className}`}
    >
      {sortTo !== undefined ? (
        <Link
          to={sortTo}
          preventScrollReset
          onClick={(event) => {
            if (!onSort || event.ctrlKey || event.metaKey || event.shiftKey || event.altKey) return;
            event.preventDefault();
            onSort();
          }}
          className={actClass}
        >
          {words}
        </Link>
      ) : onSort ? (
        <button type="button" onClick={onSort} className={actClass}>
          {words}
        </button>
      ) : (
        words
      )}
    </th>
  );
}

/** A row: 36 px, 44 where the pointer is coarse; `selected` is washed with a 3 px magenta bar at the left. */
export function Tr({ selected, className = "", ...rest }: ComponentProps<"tr"> & { selected?: boolean }) {
  return (
    <tr
      aria-selected={selected}
      className={`border-b border-rule ${selected ? "bg-mark-wash [&>:first-child]:inset-shadow-[3px_0_0_var(--color-mark)]" : ""} ${className}`}
      {...rest}
    />
  );
}

/** A cell: figures right, words left. `tall` rows are 48 px, 64 on phones, where a name takes two lines; words of a `wrap` cell break. */
export function Td({
  align = "left",
  tall = false,
  wrap = false,
  className = "",
  ...rest
}: Omit<ComponentProps<"td">, "align"> & {
  align?: "left" | "right" | "center";
  tall?: boolean;
  wrap?: boolean;
}) {
  const height = tall ? "h-12 max-sm:h-16" : "h-row max-sm:h-11 pointer-coarse:h-11";
  return (
    <td
      className={`px-3 max-sm:px-2 max-[24rem]:px-1 ${wrap ? "py-2 whitespace-normal" : "whitespace-nowrap"} ${height} ${ALIGN[align]} ${className}`}
      {...rest}
    />
  );
}
