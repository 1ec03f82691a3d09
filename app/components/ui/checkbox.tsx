import { Check } from "lucide-react";
import type { ComponentProps, ReactNode } from "react";

/** A box with its sentence; both are the target. */
export function Checkbox({
  children,
  className = "",
  ...input
}: Omit<ComponentProps<"input">, "type"> & { children: ReactNode }) {
  return (
    <label
      className={`flex items-start gap-3 pointer-coarse:min-h-11 pointer-coarse:items-center ${className}`}
    >
      <span className="relative grid translate-y-[calc(0.5lh-0.5rem)] size-4 shrink-0 place-items-center">
        <input
          type="checkbox"
          className="peer col-start-1 row-start-1 size-4 appearance-none rounded-sm border border-edge bg-sheet checked:border-action checked:bg-action"
          {...input}
        />
        <Check
          aria-hidden="true"
          strokeWidth={3}
          className="pointer-events-none invisible col-start-1 row-start-1 size-3 text-on-action peer-checked:visible"
        />
      </span>
      <span>{children}</span>
    </label>
  );
}

/** A radio button; the chosen one is magenta, since the person set it. */
export function Radio({ className = "", ...input }: Omit<ComponentProps<"input">, "type">) {
  return (
    <input
      type="radio"
      className={`size-4 shrink-0 appearance-none rounded-full border-[1.5px] border-edge bg-sheet checked:border-[5px] checked:border-mark ${className}`}
      {...input}
    />
  );
}
