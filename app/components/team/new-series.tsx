import { useState } from "react";
import { href, useFetcher, useNavigate } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { type ActAnswer, useOnceDone } from "./ensemble-acts";

/** The button and its dialog; the new series opens. */
export function NewSeries({ team }: { team: string }) {
  const [open, setOpen] = useState(false);
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={<Button>New series</Button>}
      title="New series"
      description="A series holds ensembles that belong together: a compound series, a question."
    >
      <SeriesForm team={team} onClose={() => setOpen(false)} />
    </Dialog>
  );
}

function SeriesForm({ team, onClose }: { team: string; onClose: () => void }) {
  const fetcher = useFetcher<ActAnswer>();
  const navigate = useNavigate();
  const { data, state } = fetcher;
  const page = href("/teams/:team", { team });
  useOnceDone(state === "idle" && data?.seriesId !== undefined, () => {
    onClose();
    navigate(`${page}?series=${data?.seriesId}`);
  });
  return (
    <fetcher.Form method="post" action={`${page}?index`} className="grid gap-4">
      <input type="hidden" name="intent" value="new-series" />
      <TextField
        label="Name"
        name="name"
        required
        maxLength={120}
        autoComplete="off"
        error={state === "idle" ? data?.message : undefined}
      />
      <DialogFoot>
        <SubmitButton pending={state !== "idle"} pendingLabel="Making the series">
          Make series
        </SubmitButton>
        <Button kind="quiet" onClick={onClose}>
          Cancel
        </Button>
      </DialogFoot>
    </fetcher.Form>
  );
}
