/** A block in the shape of what is coming, seen only after 300 ms. Say in words beside it what is being counted. */
export function Skeleton({ className = "h-4 w-full" }: { className?: string }) {
  return <span aria-hidden="true" className={`appear-late block rounded-sm bg-sunk ${className}`} />;
}
