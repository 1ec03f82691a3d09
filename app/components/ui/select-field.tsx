import { ChevronDown } from "lucide-react";
import type { ComponentProps, ReactNode } from "react";
import { Field, type FieldNotes, frameClass, useFieldIds } from "./field";

export interface Choice {
  value: string;
  label: string;
  disabled?: boolean;
}

/** One of many, by the browser's own list: works by keyboard, on phones and without script. `mark` stands before the value. */
export function SelectField({
  label,
  aside,
  help,
  error,
  hideLabel,
  className,
  choices,
  mark,
  id: givenId,
  ...select
}: FieldNotes & ComponentProps<"select"> & { choices: readonly Choice[]; mark?: ReactNode }) {
  const { id, describedBy } = useFieldIds(givenId, { help, error });
  return (
    <Field {...{ id, label, aside, help, error, hideLabel, className }}>
      <span className={`relative ${frameClass(Boolean(error))} px-0!`}>
        {mark ? <span className="pointer-events-none absolute left-3 flex">{mark}</span> : null}
        <select
          id={id}
          aria-invalid={error ? true : undefined}
          aria-describedby={describedBy}
          className={`h-full w-full min-w-0 appearance-none truncate bg-transparent pr-8 text-ink outline-none ${mark ? "pl-8" : "pl-3"}`}
          {...select}
        >
          {choices.map((choice) => (
            <option key={choice.value} value={choice.value} disabled={choice.disabled}>
              {choice.label}
            </option>
          ))}
        </select>
        <ChevronDown aria-hidden="true" className="pointer-events-none absolute right-3 size-4" />
      </span>
    </Field>
  );
}

/** A filter above a table, 28 px: "Level: any". Magenta while it hides something. */
export function FilterSelect({
  label,
  choices,
  active,
  className = "",
  ...select
}: ComponentProps<"select"> & { label: string; choices: readonly Choice[]; active: boolean }) {
  return (
    <span
      className={`relative inline-flex items-center rounded-md border bg-sheet font-medium ${active ? "border-mark text-mark" : "border-edge text-ink"} ${className}`}
    >
      <select
        aria-label={label}
        className="field-sizing-content h-7 max-w-full appearance-none truncate rounded-md bg-transparent pr-8 pl-3 max-sm:h-9 pointer-coarse:h-11"
        {...select}
      >
        {choices.map((choice) => (
          <option key={choice.value} value={choice.value}>
            {choice.label}
          </option>
        ))}
      </select>
      <ChevronDown aria-hidden="true" className="pointer-events-none absolute right-2 size-4" />
    </span>
  );
}
