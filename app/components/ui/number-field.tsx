import { createContext, type KeyboardEvent, useContext, useLayoutEffect, useRef, useState } from "react";
import { readNumber, readTyped } from "~/lib/format";
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

/**
 * All settings that stand beside a field, as text. A refused entry was typed while they were so: where any of them
 * changes, the field shows the value that holds.
 */
export const BesideField = createContext("");

/** What is being typed over a value; once another value comes from elsewhere it is of no more use. */
interface Draft {
  text: string;
  over: number | null;
  beside: string;
  fault: string | null;
  /** The text that was refused; another one is being put right. */
  refused?: string;
}

/** Whether what was typed still has its occasion; what is being typed outlives a change of other settings. */
export function stillTyped(draft: Omit<Draft, "fault">, value: number | null, beside: string): boolean {
  return draft.over === value && (draft.beside === beside || draft.text !== draft.refused);
}

/**
 * A typed number with its unit. Arrow keys move it one step, page keys ten; a slip stays in the field with what would be
 * right, until it is put right or the value is set from elsewhere. Coming in marks the whole number, so that typing
 * replaces it.
 */
export function NumberField(props: NumberFieldProps) {
  const { label, aside, help, hideLabel, className, value, bare } = props;
  const [typed, setTyped] = useState<Draft | null>(null);
  const beside = useContext(BesideField);
  const draft = typed !== null && stillTyped(typed, value, beside) ? typed : null;
  // Gone for good: it must not come back when the settings do.
  if (draft === null && typed !== null) setTyped(null);
  const fault = draft?.beside === beside ? draft.fault : null;
  const error = fault ?? props.error;
  const ids = useFieldIds(bare?.id, { help, error });
  const input = useMarkedOnEntry(draft === null ? value : null);

  const clear = () => {
    setTyped(null);
    bare?.onError(null);
  };
  const settle = (text: string) => {
    const read = readNumber(text, props.unit);
    const emptied = props.optional && text.trim() === "";
    if (!emptied && (read.value === null || !inRange(read.value, props))) {
      const said = [read.value === null ? read.fault : null, props.wrong].filter(Boolean).join(" ");
      setTyped({ text, over: value, beside, fault: said, refused: text });
      bare?.onError(said);
      return;
    }
    clear();
    const next = emptied ? null : read.value;
    if (next !== value) props.onCommit(next);
  };

  const onKeyDown = (event: KeyboardEvent<HTMLInputElement>) => {
    if (event.key === "Enter" && draft !== null) {
      event.preventDefault();
      settle(draft.text);
      return;
    }
    if (event.key === "Escape" && draft !== null) {
      event.stopPropagation();
      clear();
      return;
    }
    const steps = { ArrowUp: 1, ArrowDown: -1, PageUp: 10, PageDown: -10 }[event.key];
    const from = draft === null ? value : readTyped(draft.text, props.unit);
    if (steps === undefined || props.step === undefined || from === null) return;
    event.preventDefault();
    // Rounded to the step's own decimals: 0.25 + 0.01 is 0.26, not 0.26000000000000001.
    const next = Number((from + steps * props.step).toFixed(10));
    if (inRange(next, props)) {
      clear();
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
        value={draft?.text ?? (value === null ? "" : props.write(value))}
        onChange={(event) =>
          setTyped({ text: event.currentTarget.value, over: value, beside, fault, refused: draft?.refused })
        }
        onBlur={() => draft !== null && settle(draft.text)}
        {...input}
        onKeyDown={onKeyDown}
      />
      {props.unit ? <span className="whitespace-nowrap text-ink-3">{props.unit}</span> : null}
    </div>
  );
  if (bare) return control;
  return <Field {...{ id: ids.id, label, aside, help, error, hideLabel, className }}>{control}</Field>;
}

/**
 * Marks the whole text when the field is entered, and again when the value in it changes under the cursor. A click that
 * drags marks what it drags over.
 */
function useMarkedOnEntry(value: number | null) {
  const ref = useRef<HTMLInputElement>(null);
  const entered = useRef(false);
  useLayoutEffect(() => {
    if (value !== null && ref.current === document.activeElement) ref.current?.select();
  }, [value]);
  return {
    ref,
    onFocus: () => ref.current?.select(),
    onPointerDown: () => {
      entered.current = ref.current !== document.activeElement;
    },
    onPointerUp: () => {
      const field = ref.current;
      if (entered.current && field && field.selectionStart === field.selectionEnd) field.select();
      entered.current = false;
    },
  };
}
