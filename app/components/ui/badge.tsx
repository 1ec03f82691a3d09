import { Check, Lock, X } from "lucide-react";
import type { ReactNode } from "react";

export type BadgeTone = "plain" | "held" | "remark" | "good" | "danger" | "ask" | "locked";

const TONES: Record<BadgeTone, string> = {
  plain: "border-rule-2 text-ink-2",
  held: "border-held-edge bg-held-ground text-held",
  remark: "border-remark-edge bg-remark-ground text-remark",
  good: "border-good-edge bg-good-ground text-good",
  danger: "border-danger-edge bg-danger-ground text-danger",
  ask: "border-mark text-mark",
  locked: "border-rule-2 text-ink-2",
};

/** Two upright bars: kept, but nothing sails there. */
function HeldBars() {
  return (
    <svg viewBox="0 0 16 16" aria-hidden="true" className="size-3 fill-none stroke-current stroke-2">
      <path d="M6 4v8M10 4v8" strokeLinecap="round" />
    </svg>
  );
}

function RemarkSign() {
  return (
    <svg viewBox="0 0 16 16" aria-hidden="true" className="size-3 fill-none stroke-current stroke-2">
      <path d="M8 3v6.5M8 12.5v.1" strokeLinecap="round" />
    </svg>
  );
}

const SIGNS: Record<BadgeTone, ReactNode> = {
  plain: null,
  held: <HeldBars />,
  remark: <RemarkSign />,
  good: <Check aria-hidden="true" className="size-3" />,
  danger: <X aria-hidden="true" className="size-3" />,
  ask: null,
  locked: <Lock aria-hidden="true" className="size-3" />,
};

/** 20 px, text first, colour second. `ask` waits for the person who looks. */
export function Badge({
  tone = "plain",
  children,
  title,
}: {
  tone?: BadgeTone;
  children: ReactNode;
  title?: string;
}) {
  return (
    <span
      title={title}
      className={`figures inline-flex h-5 items-center gap-1 rounded-sm border px-2 text-xs leading-none whitespace-nowrap ${TONES[tone]}`}
    >
      {SIGNS[tone]}
      {children}
    </span>
  );
}

/** Degeneracy where it is the subject: ×2. */
export function DegeneracyBadge({ value }: { value: number }) {
  return <Badge>×{value}</Badge>;
}
