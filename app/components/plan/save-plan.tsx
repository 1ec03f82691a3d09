import { useEffect, useState } from "react";
import { useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { SelectField } from "~/components/ui/select-field";
import { showToast } from "~/components/ui/toast";
import type { PlanSet } from "~/lib/plan/plan";
import type { SavedPlans } from "~/services/plans/list-plans.server";

/** The plan that is open: its row and the version that was opened. */
export interface OpenPlan {
  id: string;
  name: string;
  version: number;
}

type Answer =
  | { ok: true; saved: { id: string; version: number } | null }
  | { ok?: undefined; message: string };

/** Opens a stored plan, saves the one at hand under its name or another, removes it. */
export function SavePlan({
  set,
  open,
  saved,
  readOnly,
  onOpen,
}: {
  set: PlanSet;
  open: OpenPlan | null;
  saved: readonly SavedPlans[];
  readOnly: boolean;
  /** With null a fresh draft. */
  onOpen: (plan: SavedPlans | null) => void;
}) {
  return (
    <div className="mt-4 flex flex-wrap items-end gap-3 noscript:hidden print:hidden">
      {saved.length > 0 ? (
        <SelectField
          label="Plan"
          className="min-w-56"
          value={open?.id ?? ""}
          onChange={(event) => onOpen(saved.find((one) => one.id === event.currentTarget.value) ?? null)}
          choices={[
            { value: "", label: "New draft" },
            ...saved.map((one) => ({ value: one.id, label: `${one.name}, version ${one.version}` })),
          ]}
        />
      ) : null}
      {readOnly ? null : <SaveDialog key={open?.id ?? "new"} set={set} open={open} onOpen={onOpen} />}
      {readOnly || open === null ? null : <RemoveButton open={open} onOpen={onOpen} />}
    </div>
  );
}

function SaveDialog({
  set,
  open,
  onOpen,
}: {
  set: PlanSet;
  open: OpenPlan | null;
  onOpen: (plan: SavedPlans | null) => void;
}) {
  const [shown, setShown] = useState(false);
  const [asNew, setAsNew] = useState(open === null);
  const [name, setName] = useState(open?.name ?? "");
  const fetcher = useFetcher<Answer>();
  const answer = fetcher.data;
  const refused = answer && !answer.ok ? answer.message : undefined;
  // biome-ignore lint/correctness/useExhaustiveDependencies: only a new answer is news
  useEffect(() => {
    if (fetcher.state !== "idle" || !answer?.ok || !answer.saved) return;
    setShown(false);
    onOpen({ ...answer.saved, name: name.trim(), changedAt: new Date().toISOString(), plans: set });
    showToast({
      tone: "done",
      badge: "saved",
      text: `The plan ${name.trim()}, version ${answer.saved.version}.`,
    });
  }, [answer, fetcher.state]);
  return (
    <Dialog
      open={shown}
      onOpenChange={setShown}
      trigger={<Button kind="primary">Save plan</Button>}
      title={open === null ? "Save this plan" : `Save ${open.name}`}
      description="Everybody in the team sees it. The logbook notes who saved it."
    >
      <fetcher.Form method="post" className="grid gap-4">
        <input type="hidden" name="intent" value="save" />
        <input type="hidden" name="plans" value={JSON.stringify(set)} />
        {open !== null && !asNew ? (
          <>
            <input type="hidden" name="id" value={open.id} />
            <input type="hidden" name="version" value={open.version} />
          </>
        ) : null}
        {open === null ? null : (
          <SelectField
            label="As"
            value={asNew ? "new" : "same"}
            onChange={(event) => setAsNew(event.currentTarget.value === "new")}
            choices={[
              { value: "same", label: `Version ${open.version + 1} of ${open.name}` },
              { value: "new", label: "A plan of its own" },
            ]}
          />
        )}
        <TextField
          label="Name"
          name="name"
          value={name}
          onChange={(event) => setName(event.currentTarget.value)}
          required
          maxLength={120}
          autoComplete="off"
          error={refused}
        />
        <DialogFoot>
          <SubmitButton pending={fetcher.state !== "idle"}>Save the plan</SubmitButton>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}

function RemoveButton({ open, onOpen }: { open: OpenPlan; onOpen: (plan: SavedPlans | null) => void }) {
  const [shown, setShown] = useState(false);
  const fetcher = useFetcher<Answer>();
  // biome-ignore lint/correctness/useExhaustiveDependencies: only a new answer is news
  useEffect(() => {
    if (fetcher.state !== "idle" || !fetcher.data?.ok) return;
    setShown(false);
    showToast({ tone: "done", badge: "removed", text: `The plan ${open.name}.` });
    onOpen(null);
  }, [fetcher.data, fetcher.state]);
  return (
    <Dialog
      open={shown}
      onOpenChange={setShown}
      trigger={<Button kind="stop">Remove</Button>}
      title={`Remove the plan ${open.name}?`}
      description="Nobody in the team will find it again. The conformers and their energies stay."
    >
      <fetcher.Form method="post">
        <input type="hidden" name="intent" value="remove" />
        <input type="hidden" name="id" value={open.id} />
        <DialogFoot>
          <SubmitButton kind="stop" pending={fetcher.state !== "idle"}>
            Remove the plan
          </SubmitButton>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}
