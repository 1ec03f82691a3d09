/** 4 px, in `action`. `share` from 0 to 1; null where the end is not known yet. */
export function ProgressBar({ share, label }: { share: number | null; label: string }) {
  const percent = share === null ? null : Math.round(Math.min(1, Math.max(0, share)) * 100);
  return (
    <span
      role="progressbar"
      aria-label={label}
      aria-valuemin={0}
      aria-valuemax={100}
      aria-valuenow={percent ?? undefined}
      className="block"
    >
      <svg aria-hidden="true" width="100%" height="4" className="block">
        <rect width="100%" height="4" rx="2" className="fill-rule" />
        <rect
          width={`${percent ?? 0}%`}
          height="4"
          rx="2"
          className="fill-action transition-[width] duration-(--duration-move)"
        />
      </svg>
    </span>
  );
}
