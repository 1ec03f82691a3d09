import { type ComponentProps, type ReactNode, useId } from "react";

export interface FieldNotes {
  label: ReactNode;
  /** Right of the label: "Forgotten?". */
  aside?: ReactNode;
  help?: ReactNode;
  /** What would be right, not only what is wrong. */
  error?: ReactNode;
  /** The label stays for screen readers only. */
  hideLabel?: boolean;
}

/** Frame of a control: border, height and focus ring; the input inside draws none of them. */
export function frameClass(invalid: boolean): string {
  return (
    "flex h-9 min-w-0 items-center gap-2 rounded-md border bg-sheet px-3 max-sm:h-11 max-sm:text-base pointer-coarse:h-11 " +
    "has-[:focus-visible]:outline-2 has-[:focus-visible]:outline-offset-2 has-[:focus-visible]:outline-mark " +
    "has-[:disabled]:border-rule-2 has-[:disabled]:text-ink-off " +
    (invalid ? "border-danger-edge inset-ring inset-ring-danger-edge" : "border-edge")
  );
}

export const labelClass = "text-xs font-medium text-ink-3";

/** Ids that tie a control to its label, help and error. */
export function useFieldIds(given: string | undefined, notes: { help?: ReactNode; error?: ReactNode }) {
  const made = useId();
  const id = given ?? made;
  const describedBy = [notes.error ? `${id}-error` : null, notes.help ? `${id}-help` : null]
    .filter((part) => part !== null)
    .join(" ");
  return { id, describedBy: describedBy || undefined };
}

/** Label above, control, error or help below. `id` names the control inside. */
export function Field({
  id,
  label,
  aside,
  help,
  error,
  hideLabel,
  className = "",
  children,
}: FieldNotes & { id: string; className?: string; children: ReactNode }) {
  return (
    <div className={`relative min-w-0 ${className}`}>
      <div className={hideLabel ? "sr-only" : "mb-2 flex items-baseline"}>
        <label htmlFor={id} className={labelClass}>
          {label}
        </label>
      </div>
      {children}
      <FieldFoot id={id} help={help} error={error} />
      {/* Seen beside the label, reached after the control: whoever tabs wants to type first. */}
      {aside ? (
        <span className="absolute -top-1 right-0 inline-flex min-h-6 items-center text-xs">{aside}</span>
      ) : null}
    </div>
  );
}

/** The lines below a control. An error is announced when it comes up. */
export function FieldFoot({ id, help, error }: { id: string; help?: ReactNode; error?: ReactNode }) {
  return (
    <>
      {error ? (
        <p id={`${id}-error`} role="alert" className="mt-2 text-xs text-danger">
          {error}
        </p>
      ) : null}
      {help ? (
        <p id={`${id}-help`} className={error ? "sr-only" : "mt-2 text-xs text-ink-3"}>
          {help}
        </p>
      ) : null}
    </>
  );
}

/** One line of text; `unit` stands inside at the right, `icon` at the left. */
export function TextField({
  label,
  aside,
  help,
  error,
  hideLabel,
  unit,
  icon,
  className,
  id: givenId,
  ...input
}: FieldNotes & ComponentProps<"input"> & { unit?: string; icon?: ReactNode }) {
  const { id, describedBy } = useFieldIds(givenId, { help, error });
  return (
    <Field {...{ id, label, aside, help, error, hideLabel, className }}>
      <div className={`${frameClass(Boolean(error))} [&_svg]:size-4 [&_svg]:shrink-0`}>
        {icon}
        <input
          id={id}
          aria-invalid={error ? true : undefined}
          aria-describedby={describedBy}
          className="h-full min-w-0 flex-1 bg-transparent text-ink outline-none"
          {...input}
        />
        {unit ? <span className="whitespace-nowrap text-ink-3">{unit}</span> : null}
      </div>
    </Field>
  );
}
