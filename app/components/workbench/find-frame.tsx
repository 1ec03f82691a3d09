import { Search } from "lucide-react";
import { type FormEvent, useId, useState } from "react";
import { Button } from "~/components/ui/button";
import { frameClass, labelClass } from "~/components/ui/field";
import { TextButton } from "~/components/ui/text-link";
import { formatCount } from "~/lib/format";
import { frameSentence } from "~/lib/workbench/findings";
import { useWorkbench } from "./workbench-context";

/** Which conformer is frame N? The answer names whom it repeats, how near, and shows it. */
export function FindFrame() {
  const { roles, ensemble, show } = useWorkbench();
  const id = useId();
  const [asked, setAsked] = useState<number | null>(null);
  const [wrong, setWrong] = useState(false);
  const find = (event: FormEvent<HTMLFormElement>) => {
    event.preventDefault();
    const text = String(new FormData(event.currentTarget).get("frame") ?? "").trim();
    const frame = /^\d{1,7}$/.test(text) ? Number(text) : 0;
    const there = frame >= 1 && frame <= ensemble.frames;
    setWrong(!there);
    setAsked(there ? frame : null);
  };
  const role = asked === null ? undefined : roles.get(asked);
  const over = role?.kind === "repeat" ? [role.repeats, asked ?? 0] : asked === null ? [] : [asked];
  return (
    <div className="mt-6 noscript:hidden print:hidden">
      <form onSubmit={find} className="flex flex-wrap items-end gap-3">
        <div>
          <label htmlFor={id} className={`mb-2 block ${labelClass}`}>
            Which conformer is frame
          </label>
          <span className={`${frameClass(wrong)} w-32`}>
            <input
              id={id}
              name="frame"
              inputMode="numeric"
              autoComplete="off"
              placeholder={`1 to ${formatCount(ensemble.frames)}`}
              aria-invalid={wrong || undefined}
              aria-describedby={`${id}-answer`}
              className="h-full min-w-0 flex-1 bg-transparent text-ink outline-none"
            />
          </span>
        </div>
        <Button type="submit" icon={<Search aria-hidden="true" />}>
          Find a frame
        </Button>
        <p id={`${id}-answer`} role="status" className="figures min-h-9 content-center">
          {wrong ? (
            <span className="text-danger">
              Frames are numbered from 1 to {formatCount(ensemble.frames)}, in file order.
            </span>
          ) : asked !== null ? (
            <>
              {frameSentence(asked, role)}{" "}
              {role?.kind === "kept" || role?.kind === "repeat" || role?.kind === "outside-window" ? (
                <TextButton onClick={() => show(over)}>
                  {role.kind === "repeat" ? "Lay over" : "Show in the view"}
                </TextButton>
              ) : null}
            </>
          ) : null}
        </p>
      </form>
    </div>
  );
}
