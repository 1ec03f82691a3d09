import { useEffect, useRef, useState } from "react";
import { href, useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogClose, DialogFoot } from "~/components/ui/dialog";
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
  ensembleId,
  set,
  open,
  saved,
  readOnly,
  onOpen,
  onSaved,
  onRemoved,
}: {
  ensembleId: string;
  set: PlanSet;
  open: OpenPlan | null;
  saved: readonly SavedPlans[];
  readOnly: boolean;
  /** With null a fresh draft. */
  onOpen: (plan: SavedPlans | null) => void;
  onSaved: (plan: SavedPlans) => void;
  /** @returns shows again what was at hand, once the plan is back */
  onRemoved: () => () => void;
}) {
  const removal = useRemoval(ensembleId, onRemoved);
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
      {readOnly ? null : <SaveDialog key={open?.id ?? "new"} set={set} open={open} onSaved={onSaved} />}
      {readOnly || open === null ? null : <RemoveDialog open={open} {...removal} />}
    </div>
  );
}

function SaveDialog({
  set,
  open,
  onSaved,
}: {
  set: PlanSet;
  open: OpenPlan | null;
  onSaved: (plan: SavedPlans) => void;
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
    onSaved({ ...answer.saved, name: name.trim(), changedAt: new Date().toISOString(), plans: set });
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

/** Removes a plan and brings it back: from the toast for a moment, from the list at the foot for thirty days. */
function useRemoval(ensembleId: string, onRemoved: () => () => void) {
  const fetcher = useFetcher<Answer>();
  const action = href("/ensembles/:id/plan", { id: ensembleId });
  const asked = useRef<{ plan: OpenPlan; back: (() => void) | null } | null>(null);
  const told = useRef<Answer | undefined>(undefined);
  const { data, state, submit } = fetcher;
  const send = (intent: "remove" | "restore", plan: OpenPlan, back: (() => void) | null) => {
    asked.current = { plan, back };
    void submit({ intent, id: plan.id }, { method: "post", action });
  };
  // biome-ignore lint/correctness/useExhaustiveDependencies: only a new answer is news
  useEffect(() => {
    const last = asked.current;
    if (state !== "idle" || !data || told.current === data || last === null) return;
    told.current = data;
    const { plan, back } = last;
    if (!data.ok) showToast({ tone: "failed", text: data.message });
    else if (back !== null) {
      back();
      showToast({ tone: "done", badge: "back", text: `The plan ${plan.name}.` });
    } else {
      const again = onRemoved();
      showToast({
        tone: "done",
        badge: "removed",
        text: `The plan ${plan.name}.`,
        action: { label: "Undo", act: () => send("restore", plan, again) },
      });
    }
  }, [data, state]);
  return { pending: state !== "idle", onRemove: (plan: OpenPlan) => send("remove", plan, null) };
}

function RemoveDialog({
  open,
  pending,
  onRemove,
}: {
  open: OpenPlan;
  pending: boolean;
  onRemove: (plan: OpenPlan) => void;
}) {
  return (
    <Dialog
      trigger={<Button kind="stop">Remove plan</Button>}
      title={`Remove the plan ${open.name}?`}
      description="Nobody in the team sees it then; for thirty days it can be brought back. The conformers and their energies stay."
    >
      <DialogFoot>
        <DialogClose asChild>
          <Button kind="stop" disabled={pending} onClick={() => onRemove(open)}>
            Remove the plan
          </Button>
        </DialogClose>
        <DialogClose asChild>
          <Button>Keep it</Button>
        </DialogClose>
      </DialogFoot>
    </Dialog>
  );
}
