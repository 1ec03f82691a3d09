import { type FormEvent, useId, useState } from "react";
import { Button, SubmitButton } from "~/components/ui/button";
import { Field, frameClass } from "~/components/ui/field";
import { type PastedValues, unreadWords } from "~/lib/averages/pasted";

type Unread = PastedValues<unknown>["unread"];

/** Measured values as a pasted list. */
export function MeasuredPaste({
  what,
  placeholder,
  onTake,
}: {
  /** What a line names: "atom", "property". */
  what: string;
  placeholder: string;
  /** Takes what the text says, and returns the lines that were not taken. */
  onTake: (text: string, commas: boolean) => Unread;
}) {
  const id = useId();
  const [text, setText] = useState("");
  const [unread, setUnread] = useState<Unread>([]);
  const take = (commas: boolean) => {
    const left = onTake(text, commas);
    setUnread(left);
    // What was taken is gone from the list; what was not stays to be put right.
    setText(left.map(({ line }) => line).join("\n"));
  };
  const wrong = unread.length > 0;
  return (
    <form
      onSubmit={(event: FormEvent) => {
        event.preventDefault();
        take(false);
      }}
      className="grid max-w-read gap-3 print:hidden"
    >
      <Field
        id={id}
        label={`A list to take in, ${what === "atom" ? "an" : "a"} ${what} and a value a line`}
        error={wrong ? `Not read. ${unreadWords(unread, what)}` : undefined}
      >
        <textarea
          id={id}
          rows={3}
          value={text}
          placeholder={placeholder}
          spellCheck={false}
          aria-invalid={wrong ? true : undefined}
          aria-describedby={wrong ? `${id}-error` : undefined}
          className={`figures ${frameClass(wrong)} h-auto! w-full py-2`}
          onChange={(event) => {
            setText(event.currentTarget.value);
            setUnread([]);
          }}
        />
      </Field>
      <div className="flex flex-wrap gap-3">
        <SubmitButton kind="plain" disabled={text.trim() === ""}>
          Take the values
        </SubmitButton>
        {unread.some(({ why }) => why === "comma") ? (
          <Button onClick={() => take(true)}>Read commas as decimal commas</Button>
        ) : null}
      </div>
    </form>
  );
}
