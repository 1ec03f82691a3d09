import { type FormEvent, useId, useState } from "react";
import { SubmitButton } from "~/components/ui/button";
import { Field, frameClass } from "~/components/ui/field";
import { readPasted } from "~/lib/averages/measured";

/** Measured values as a pasted list. */
export function MeasuredPaste({
  groupOf,
  onRead,
}: {
  groupOf: ReadonlyMap<number, number>;
  onRead: (values: ReadonlyMap<number, number>) => void;
}) {
  const id = useId();
  const [text, setText] = useState("");
  const [said, setSaid] = useState<string | null>(null);
  const take = (event: FormEvent) => {
    event.preventDefault();
    const { values, unread } = readPasted(text, groupOf);
    if (values.size > 0) onRead(values);
    setSaid(
      unread.length > 0
        ? `Not read: ${unread.slice(0, 3).join("; ")}${unread.length > 3 ? ` and ${unread.length - 3} more` : ""}. A line is an atom of the table and a number with a decimal point: C4 77.3.`
        : null,
    );
    if (unread.length === 0) setText("");
  };
  return (
    <form onSubmit={take} className="grid max-w-read gap-3 print:hidden">
      <Field id={id} label="A list to take in, an atom and a value a line" error={said ?? undefined}>
        <textarea
          id={id}
          rows={3}
          value={text}
          placeholder={"C1 77.30\nH4 1.21"}
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
