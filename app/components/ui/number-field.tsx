import { type KeyboardEvent, useState } from "react";
import { readTyped } from "~/lib/format";
import { Field, type FieldNotes, frameClass, useFieldIds } from "./field";

export interface NumberRange {
  min?: number;
  max?: number;
  /** True where the least value itself is not allowed: a tolerance lies above 0. */
  above?: boolean;
}

export function inRange(value: number, { min, max, above }: NumberRange): boolean {
  if (min !== undefined && (above ? value <= min : value < min)) return false;
  return max === undefined || value <= max;
}

export interface NumberFieldProps extends FieldNotes, NumberRange {
  value: number | null;
  /** Called with a number in range on Enter or on leaving the field; with null where `optional` and emptied. */
  onCommit: (value: number | null) => void;
  /** How the value is written when nobody edits it. */
  write: (value: number) => string;
  /** What would be right: "A tolerance lies above 0 Å, for example 0.250." */
  wrong: string;
  unit?: string;
  step?: number;
  optional?: boolean;
  placeholder?: string;
  name?: string;
  disabled?: boolean;
  className?: string;
  /** Without label line and foot, where a slider carries them. */
  bare?: { id: string; describedBy: string | undefined; onError: (text: string | null) => void };
}

/** A typed number with its unit. Arrow keys move it one step, page keys ten; a slip stays in the field with what would be right. */
export function NumberField(props: NumberFieldProps) {
  const { label, aside, help, hideLabel, className, value, bare } = props;
  const [draft, setDraft] = useState<string | null>(null);
  const [wrong, setWrong] = useState(false);
  const error = wrong ? props.wrong : props.error;
  const ids = useFieldIds(bare?.id, { help, error });

  const settle = (text: string) => {
    const typed = readTyped(text);
    const emptied = props.optional && text.trim() === "";
    if (!emptied && (typed === null || !inRange(typed, props))) {
      setWrong(true);
      bare?.onError(props.wrong);
      return;
    }
    setWrong(false);
    bare?.onError(null);
    setDraft(null);
    const next = emptied ? null : typed;
    if (next !== value) props.onCommit(next);
  };

  const onKeyDown = (event: KeyboardEvent<HTMLInputElement>) => {
    if (event.key === "Enter" && draft !== null) {
      event.preventDefault();
      settle(draft);
      return;
    }
    if (event.key === "Escape" && draft !== null) {
      event.stopPropagation();
      setDraft(null);
      setWrong(false);
      bare?.onError(null);
      return;
    }
    const steps = { ArrowUp: 1, ArrowDown: -1, PageUp: 10, PageDown: -10 }[event.key];
    const from = draft === null ? value : readTyped(draft);
    if (steps === undefined || props.step === undefined || from === null) return;
    event.preventDefault();
    // Rounded to the step's own decimals: 0.25 + 0.01 is 0.26, not 0.26000000000000001.
    const next = Number((from + steps * props.step).toFixed(10));
    if (inRange(next, props)) {
      setDraft(null);
      setWrong(false);
      bare?.onError(null);
      props.onCommit(next);
    }
  };

  const control = (
    <div className={`${frameClass(Boolean(error))} ${bare ? (className ?? "") : ""}`}>
      <input
        id={ids.id}
        name={props.name}
        type="text"
        inputMode="decimal"
        autoComplete="off"
        spellCheck={false}
        disabled={props.disabled}
        placeholder={props.placeholder}
        aria-label={bare && typeof label === "string" ? label : undefined}
        aria-invalid={error ? true : undefined}
        aria-describedby={bare?.describedBy ?? ids.describedBy}
        className={`h-full min-w-0 flex-1 bg-transparent text-ink outline-none ${bare ? "text-right" : ""}`}
        value={draft ?? (value === null ? "" : props.write(value))}
        onChange={(event) => setDraft(event.currentTarget.value)}
        onBlur={() => draft !== null && settle(draft)}
        onKeyDown={onKeyDown}
      />
      {props.unit ? <span className="whitespace-nowrap text-ink-3">{props.unit}</span> : null}
    </div>
  );
  if (bare) return control;
  return <Field {...{ id: ids.id, label, aside, help, error, hideLabel, className }}>{control}</Field>;
}
