import { useEffect, useState } from "react";
import { href, useFetcher } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { TextButton } from "~/components/ui/text-link";
import type { EnsembleView } from "~/lib/views";
import type { ActAnswer } from "./act-answer";

/** A file's name is rarely a molecule's. */
export function RenameEnsemble({ ensemble }: { ensemble: EnsembleView }) {
  const [open, setOpen] = useState(false);
  const fetcher = useFetcher<ActAnswer>();
  const answer = fetcher.data;
  useEffect(() => {
    if (answer?.ok && fetcher.state === "idle") setOpen(false);
  }, [answer, fetcher.state]);
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={<TextButton>Rename</TextButton>}
      title="Rename this ensemble"
    >
      <fetcher.Form
        method="post"
        action={href("/ensembles/:id/intake", { id: ensemble.id })}
        className="grid gap-4"
      >
        <input type="hidden" name="intent" value="rename" />
        <TextField
          label="Name"
          name="name"
          defaultValue={ensemble.name}
          maxLength={200}
          required
          autoComplete="off"
          error={answer && !answer.ok ? answer.message : undefined}
        />
        <DialogFoot>
          <SubmitButton pending={fetcher.state !== "idle"}>Rename the ensemble</SubmitButton>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}
