/** A block in the shape of what is coming, seen only after 300 ms. Say in words beside it what is being counted. */
export function Skeleton({ className = "h-4 w-full" }: { className?: string }) {
  return <span aria-hidden="true" className={`appear-late block rounded-sm bg-sunk ${className}`} />;
}

/** Rows of a table that is on its way. */
export function SkeletonRows({ rows = 6, columns }: { rows?: number; columns: number }) {
  return Array.from({ length: rows }, (_, row) => (
    <tr key={row} className="border-b border-rule">
      {Array.from({ length: columns }, (_, column) => (
        <td key={column} className="h-row px-3">
          <Skeleton className="h-3 w-3/4" />
        </td>
      ))}
    </tr>
  ));
}
