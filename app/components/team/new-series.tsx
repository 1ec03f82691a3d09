import { useEffect, useState } from "react";
import { href, useFetcher, useNavigate } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import type { ActAnswer } from "./ensemble-acts";

/** The button and its dialog; the new series opens. */
export function NewSeries({ team }: { team: string }) {
  const [open, setOpen] = useState(false);
  const fetcher = useFetcher<ActAnswer>();
  const navigate = useNavigate();
  const { data, state } = fetcher;
  useEffect(() => {
    if (state !== "idle" || !data?.seriesId) return;
    setOpen(false);
    navigate(`${href("/teams/:team", { team })}?series=${data.seriesId}`);
  }, [state, data, navigate, team]);
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={<Button>New series</Button>}
      title="New series"
      description="A series holds ensembles that belong together: a compound series, a question."
    >
      <fetcher.Form method="post" action={`${href("/teams/:team", { team })}?index`} className="grid gap-4">
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
          <Button kind="quiet" onClick={() => setOpen(false)}>
            Cancel
          </Button>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}
