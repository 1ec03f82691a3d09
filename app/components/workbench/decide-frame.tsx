import { type FormEvent, type ReactNode, useEffect, useRef, useState } from "react";
import { href } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogClose, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { TextButton } from "~/components/ui/text-link";
import { formatCount } from "~/lib/format";
import { useDecisions } from "./decisions";

/** Asks why a held frame is released. */
export function ReleaseFrame({
  ensembleId,
  frame,
  note,
}: {
  ensembleId: string;
  frame: number;
  note: string | null;
}) {
  return (
    <DecideDialog
      ensembleId={ensembleId}
      intent="release"
      frame={frame}
      trigger={
        <TextButton>
          Release…<span className="sr-only"> frame {frame}</span>
        </TextButton>
      }
      title={`Release frame ${formatCount(frame)}`}
      description={note ? `Held because: ${note}` : "It will take part in every computation."}
      placeholder="for example: energy checked against the output"
      button={`Release frame ${formatCount(frame)}`}
    />
  );
}

/** Holds a frame by hand. */
export function HoldFrame({ ensembleId, frames }: { ensembleId: string; frames: number }) {
  return (
    <DecideDialog
      ensembleId={ensembleId}
      intent="hold"
      frame={null}
      frames={frames}
      trigger={<Button size="sm">Hold a frame…</Button>}
      title="Hold a frame"
      description="It is kept, and left out of every computation until somebody releases it."
      placeholder="for example: no minimum, one imaginary mode"
      button="Hold the frame"
    />
  );
}

function DecideDialog({
  ensembleId,
  intent,
  frame,
  frames,
  trigger,
  title,
  description,
  placeholder,
  button,
}: {
  ensembleId: string;
  intent: "hold" | "release";
  frame: number | null;
  frames?: number;
  trigger: ReactNode;
  title: string;
  description: string;
  placeholder: string;
  button: string;
}) {
  const [open, setOpen] = useState(false);
  const [sent, setSent] = useState(false);
  const [outside, setOutside] = useState(false);
  const { hold, release, pending, refusal, taken } = useDecisions();
  const before = useRef(taken);
  useEffect(() => {
    if (open && taken > before.current) setOpen(false);
  }, [open, taken]);
  const send = (event: FormEvent<HTMLFormElement>) => {
    event.preventDefault();
    const form = new FormData(event.currentTarget);
    const number = frame ?? Number(form.get("frame"));
    setOutside(frames !== undefined && !(number >= 1 && number <= frames));
    if (frames !== undefined && !(number >= 1 && number <= frames)) return;
    before.current = taken;
    setSent(true);
    (intent === "hold" ? hold : release)(number, String(form.get("reason")).trim());
  };
  return (
    <Dialog
      open={open}
      onOpenChange={(next) => {
        before.current = taken;
        setOpen(next);
        setSent(false);
        setOutside(false);
      }}
      trigger={trigger}
      title={title}
      description={description}
    >
      <form
        method="post"
        action={href("/ensembles/:id/intake", { id: ensembleId })}
        onSubmit={send}
        className="grid gap-4"
      >
        <input type="hidden" name="intent" value={intent} />
        {frame === null ? (
          <TextField
            label="Frame"
            name="frame"
            inputMode="numeric"
            pattern="[1-9][0-9]*"
            required
            autoComplete="off"
            placeholder={`1 to ${formatCount(frames)}`}
            className="max-w-60"
            error={
              outside ? `Frames are numbered from 1 to ${formatCount(frames)}, in file order.` : undefined
            }
          />
        ) : (
          <input type="hidden" name="frame" value={frame} />
        )}
        <TextField
          label="Reason, for the logbook"
          name="reason"
          required
          maxLength={500}
          autoComplete="off"
          placeholder={placeholder}
          error={sent && !pending && refusal ? refusal : undefined}
        />
        <DialogFoot note="The logbook keeps who decided, when and why.">
          <SubmitButton pending={pending}>{button}</SubmitButton>
          <DialogClose asChild>
            <Button kind="quiet">Cancel</Button>
          </DialogClose>
        </DialogFoot>
      </form>
    </Dialog>
  );
}
