import { type ReactNode, useId } from "react";
import { Badge } from "./badge";
import { Radio } from "./checkbox";

/** Shell of a question: nothing is computed before it is answered. `footer` holds the button that repeats the choice. */
export function QuestionCard({
  count,
  title,
  reason,
  footer,
  children,
}: {
  /** "Question 1 of 2". */
  count: string;
  title: ReactNode;
  /** Why it is asked. */
  reason?: ReactNode;
  footer: ReactNode;
  children: ReactNode;
}) {
  const id = useId();
  return (
    <section
      aria-labelledby={id}
      className="rounded-md border border-l-3 border-rule-2 border-l-mark bg-sheet"
    >
      <header className="grid justify-items-start gap-1 px-4 pt-4 pb-3 sm:px-6">
        <Badge tone="ask">{count}</Badge>
        <h3 id={id} className="text-base font-semibold">
          {title}
        </h3>
        {reason ? <p className="text-ink-2">{reason}</p> : null}
      </header>
      <fieldset aria-labelledby={id} className="border-t border-rule">
        {children}
      </fieldset>
      <footer className="flex flex-wrap items-center gap-4 border-t border-rule px-4 py-4 text-xs text-ink-3 sm:px-6">
        {footer}
      </footer>
    </section>
  );
}

/** One choice: radio, its name, what the file shows, one line of reason. */
export function QuestionOption({
  name,
  value,
  checked,
  onChange,
  title,
  reason,
  children,
}: {
  name: string;
  value: string;
  checked: boolean;
  onChange: (value: string) => void;
  title: ReactNode;
  reason?: ReactNode;
  /** Figures at the right: values of the first frames, the spread. */
  children?: ReactNode;
}) {
  const id = useId();
  return (
    <label
      htmlFor={id}
      className="grid cursor-pointer grid-cols-[1.25rem_minmax(0,1fr)] items-start gap-x-3 border-t border-rule px-4 py-3 first:border-t-0 hover:bg-paper has-checked:bg-mark-wash sm:px-6"
    >
      <Radio
        id={id}
        name={name}
        value={value}
        checked={checked}
        onChange={() => onChange(value)}
        className="translate-y-0.5"
      />
      <span className="figures grid gap-x-4 gap-y-1 sm:grid-cols-[minmax(0,1fr)_auto]">
        <span className="min-w-0">
          <span className="font-medium break-words">{title}</span>
          {reason ? <span className="block text-xs text-ink-3">{reason}</span> : null}
        </span>
        {children}
      </span>
    </label>
  );
}
