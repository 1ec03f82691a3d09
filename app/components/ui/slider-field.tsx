import { type KeyboardEvent, useContext, useEffect, useId, useRef, useState } from "react";
import { Field, type FieldNotes } from "./field";
import { BesideField, NumberField } from "./number-field";

/** A pause after the last arrow key this long is a release: one walk by key is one step of the browser's history. */
const KEY_PAUSE_MS = 400;

/**
 * A slider and its field. Results follow while the thumb moves (`onChange`); the address is written on release
 * (`onCommit`). Arrow keys move one step, page keys ten, Home and End to the ends.
 */
export function SliderField({
  value,
  min,
  max,
  above,
  step,
  unit,
  write,
  wrong,
  onChange,
  onCommit,
  fieldMax = max,
  name,
  disabled,
  fieldClass = "w-28",
  label,
  aside,
  help,
  hideLabel,
  className,
}: FieldNotes & {
  value: number;
  min: number;
  max: number;
  above?: boolean;
  step: number;
  unit: string;
  write: (value: number) => string;
  wrong: string;
  onChange: (value: number) => void;
  onCommit: (value: number) => void;
  /** Typing may go farther than the slider. */
  fieldMax?: number;
  name?: string;
  disabled?: boolean;
  fieldClass?: string;
  className?: string;
}) {
  const id = useId();
  const beside = useContext(BesideField);
  const [slip, setSlip] = useState<{ text: string; over: number; beside: string } | null>(null);
  // A slip belongs to the settings that it was typed over: set from elsewhere, nothing is wrong any more.
  const error = slip !== null && slip.over === value && slip.beside === beside ? slip.text : null;
  if (error === null && slip !== null) setSlip(null);
  // What the last movement ended at: pointer, key and blur events must not commit the same value twice.
  const moved = useRef<number | null>(null);
  const shown = Math.min(max, Math.max(min, value));
  const share = max > min ? ((shown - min) / (max - min)) * 100 : 0;
  const describedBy = [error ? `${id}-error` : null, help ? `${id}-help` : null].filter(Boolean).join(" ");

  const move = (next: number) => {
    const inside = Math.min(max, Math.max(min, Number(next.toFixed(10))));
    if (above && inside <= min) return;
    setSlip(null);
    moved.current = inside;
    onChange(inside);
  };
  const pause = useRef<ReturnType<typeof setTimeout> | undefined>(undefined);
  const commit = useRef(onCommit);
  useEffect(() => {
    commit.current = onCommit;
  });
  useEffect(() => () => clearTimeout(pause.current), []);
  const release = () => {
    clearTimeout(pause.current);
    if (moved.current === null) return;
    const value = moved.current;
    moved.current = null;
    commit.current(value);
  };
  const releaseLater = () => {
    clearTimeout(pause.current);
    pause.current = setTimeout(release, KEY_PAUSE_MS);
  };
  const onKeyDown = (event: KeyboardEvent) => {
    const steps = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1, PageUp: 10, PageDown: -10 }[
      event.key
    ];
    clearTimeout(pause.current);
    // Counted from where the last key led: the page may follow later than the next key comes.
    const from = moved.current ?? shown;
    if (steps !== undefined) move(from + steps * step);
    else if (event.key === "Home") move(min);
    else if (event.key === "End") move(max);
    else return;
    event.preventDefault();
  };

  return (
    <Field id={id} {...{ label, aside, help, hideLabel, className }} error={error}>
      <div className="flex items-center gap-4">
        <span className="relative h-6 min-w-24 flex-1">
          <svg aria-hidden="true" className="pointer-events-none absolute inset-0 size-full overflow-visible">
            <rect x="0" y="11" width="100%" height="2" className="fill-rule-2" />
            <rect
              x="0"
              y="10"
              width={`${share}%`}
              height="4"
              className={disabled ? "fill-ink-off" : "fill-mark"}
            />
          </svg>
          <input
            id={id}
            type="range"
            min={min}
            max={max}
            step={step}
            value={shown}
            disabled={disabled}
            aria-valuetext={`${write(value)} ${unit}`}
            aria-describedby={describedBy || undefined}
            className="slider-thumb absolute inset-0 m-0 size-full"
            onChange={(event) => move(Number(event.currentTarget.value))}
            onKeyDown={onKeyDown}
            onKeyUp={releaseLater}
            onPointerUp={release}
            onBlur={release}
          />
        </span>
        <NumberField
          label={typeof label === "string" ? `${label}, typed` : label}
          value={value}
          onCommit={(next) => {
            if (next === null) return;
            onChange(next);
            onCommit(next);
          }}
          write={write}
          wrong={wrong}
          unit={unit}
          step={step}
          min={min}
          max={fieldMax}
          above={above}
          name={name}
          disabled={disabled}
          className={`flex-none ${fieldClass}`}
          bare={{
            id: `${id}-typed`,
            describedBy: describedBy || undefined,
            onError: (text) => setSlip(text === null ? null : { text, over: value, beside }),
          }}
        />
      </div>
    </Field>
  );
}
