import { type ReactNode, useId } from "react";
import { FieldFoot, labelClass } from "./field";

export interface SegmentOption<V extends string> {
  value: V;
  label: ReactNode;
  disabled?: boolean;
}

/** Two to four exclusive choices, as radio buttons underneath: arrow keys move, a form sends them without script. */
export function Segments<V extends string>({
  label,
  hideLabel = false,
  name,
  value,
  options,
  onChange,
  size = "md",
  help,
  disabled,
  className = "",
}: {
  label: ReactNode;
  hideLabel?: boolean;
  name?: string;
  value: V;
  options: readonly SegmentOption<V>[];
  onChange?: (value: V) => void;
  size?: "md" | "sm";
  help?: ReactNode;
  disabled?: boolean;
  className?: string;
}) {
  const id = useId();
  const height = size === "md" ? "h-9 px-3 text-sm" : "h-7 px-3 text-xs";
  return (
    <fieldset
      className={`min-w-0 print:hidden ${className}`}
      aria-describedby={help ? `${id}-help` : undefined}
    >
      <legend className={hideLabel ? "sr-only" : `mb-2 ${labelClass}`}>{label}</legend>
      <span className="inline-flex max-w-full rounded-md border border-edge bg-sheet">
        {options.map((option) => (
          <label
            key={option.value}
            className={`relative grid place-items-center border-l border-rule-2 font-medium whitespace-nowrap text-ink-2 first:rounded-l-sm first:border-l-0 last:rounded-r-sm hover:bg-sunk has-checked:bg-action has-checked:text-on-action has-disabled:text-ink-off has-[:checked:disabled]:bg-sunk has-[:checked:disabled]:text-ink has-[:checked:disabled]:inset-ring has-[:checked:disabled]:inset-ring-edge has-[:focus-visible]:z-1 has-[:focus-visible]:outline-2 has-[:focus-visible]:outline-offset-2 has-[:focus-visible]:outline-mark max-sm:px-2 pointer-coarse:h-11 ${height}`}
          >
            <input
              type="radio"
              name={name ?? id}
              value={option.value}
              checked={option.value === value}
              disabled={disabled || option.disabled}
              onChange={() => onChange?.(option.value)}
              className="absolute inset-0 size-full cursor-pointer opacity-0"
            />
            {/* One box: the parts of a label such as r with a raised figure stand in a line. */}
            <span>{option.label}</span>
          </label>
        ))}
      </span>
      <FieldFoot id={id} help={help} />
    </fieldset>
  );
}
