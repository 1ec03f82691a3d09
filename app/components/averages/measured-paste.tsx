import { type FormEvent, useId, useState } from "react";
import { SubmitButton } from "~/components/ui/button";
import { Field, frameClass } from "~/components/ui/field";

/** Measured values as a pasted list. */
export function MeasuredPaste({
  label,
  placeholder,
  expected,
  onTake,
}: {
  label: string;
  placeholder: string;
  /** What a line has to be: "an atom of the table and a number with a decimal point: C4 77.3". */
  expected: string;
  /** Takes what the text says, and returns the lines that say nothing. */
  onTake: (text: string) => string[];
}) {
  const id = useId();
  const [text, setText] = useState("");
  const [said, setSaid] = useState<string | null>(null);
  const take = (event: FormEvent) => {
    event.preventDefault();
    const unread = onTake(text);
    setSaid(
      unread.length > 0
        ? `Not read: ${unread.slice(0, 3).join("; ")}${unread.length > 3 ? ` and ${unread.length - 3} more` : ""}. A line is ${expected}.`
        : null,
    );
    if (unread.length === 0) setText("");
  };
  return (
    <form onSubmit={take} className="grid max-w-read gap-3 print:hidden">
      <Field id={id} label={label} error={said ?? undefined}>
        <textarea
          id={id}
          rows={3}
          value={text}
          placeholder={placeholder}
          spellCheck={false}
          aria-invalid={said ? true : undefined}
          aria-describedby={said ? `${id}-error` : undefined}
          className={`figures ${frameClass(said !== null)} h-auto! w-full py-2`}
          onChange={(event) => setText(event.currentTarget.value)}
        />
      </Field>
      <div>
        <SubmitButton kind="plain" disabled={text.trim() === ""}>
          Take the values
        </SubmitButton>
      </div>
    </form>
  );
}
