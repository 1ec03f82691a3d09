import { useEffect, useRef, useState } from "react";
import { href, useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogClose, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { TextButton } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import { formatCount } from "~/lib/format";
import type { ActAnswer } from "./act-answer";

/** Says that a hold or a release is done, and offers to take it back. */
export function useUndoToast(ensembleId: string, answer: ActAnswer | undefined) {
  const undo = useFetcher<ActAnswer>();
  const told = useRef<ActAnswer | undefined>(undefined);
  useEffect(() => {
    const done = answer?.done;
    if (!answer?.ok || !done || told.current === answer) return;
    told.current = answer;
    const { frame } = done;
    if (frame === undefined || (done.intent !== "hold" && done.intent !== "release")) return;
    const held = done.intent === "hold";
    showToast({
      tone: "done",
      badge: held ? "held" : "released",
      text: held
        ? `Frame ${formatCount(frame)} is held and left out of every computation.`
        : `Frame ${formatCount(frame)} takes part again.`,
      action: {
        label: "Undo",
        act: () =>
          void undo.submit(
            {
              intent: held ? "release" : "hold",
              frame: String(frame),
              reason: `Undone: ${done.reason ?? ""}`.trim(),
            },
            { method: "post", action: href("/ensembles/:id/intake", { id: ensembleId }) },
          ),
      },
    });
  }, [answer, ensembleId, undo]);
  useEffect(() => {
    if (undo.data && !undo.data.ok)
      showToast({ tone: "failed", text: undo.data.message ?? "This could not be undone." });
  }, [undo.data]);
}

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
  trigger: React.ReactNode;
  title: string;
  description: string;
  placeholder: string;
  button: string;
}) {
  const [open, setOpen] = useState(false);
  const fetcher = useFetcher<ActAnswer>();
  const answer = fetcher.data;
  useUndoToast(ensembleId, answer);
  useEffect(() => {
    if (answer?.ok && fetcher.state === "idle") setOpen(false);
  }, [answer, fetcher.state]);
  return (
    <Dialog open={open} onOpenChange={setOpen} trigger={trigger} title={title} description={description}>
      <fetcher.Form
        method="post"
        action={href("/ensembles/:id/intake", { id: ensembleId })}
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
            className="max-w-40"
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
          error={answer && !answer.ok ? answer.message : undefined}
        />
        <DialogFoot note="The logbook keeps who decided, when and why.">
          <SubmitButton pending={fetcher.state !== "idle"}>{button}</SubmitButton>
          <DialogClose asChild>
            <Button kind="quiet">Cancel</Button>
          </DialogClose>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}
