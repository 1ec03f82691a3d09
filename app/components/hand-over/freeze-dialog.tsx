import { useEffect, useState } from "react";
import { useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogClose, DialogFoot } from "~/components/ui/dialog";
import { Field, frameClass, TextField } from "~/components/ui/field";
import { Note } from "~/components/ui/note";
import { showToast } from "~/components/ui/toast";
import { useWorkbench } from "~/components/workbench/workbench-context";
import type { HandOverView } from "~/lib/edition/views";
import { capital, formatCount, formatTemperature, plural, withUnit } from "~/lib/format";
import type { HandOverAnswer } from "./answer";

/** One question: what goes in, what it is called, and what it will say of open findings. */
export function FreezeDialog({
  next,
  last,
}: {
  next: NonNullable<HandOverView["next"]>;
  last: number | null;
}) {
  const { sift, state } = useWorkbench();
  const fetcher = useFetcher<HandOverAnswer>();
  const [open, setOpen] = useState(false);
  const { data, state: sending } = fetcher;
  useEffect(() => {
    if (sending !== "idle" || data?.frozen === undefined) return;
    setOpen(false);
    showToast({
      tone: "done",
      badge: "frozen",
      text: `Edition ${data.frozen} is frozen. Nobody can change it.`,
    });
  }, [sending, data]);
  if (sift === null) return null;
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={
        <Button kind="primary" size="sm">
          Freeze edition {next.number}
        </Button>
      }
      title={`Freeze edition ${next.number}`}
    >
      <Contents next={next} last={last} />
      <fetcher.Form method="post" className="grid gap-4">
        <input type="hidden" name="intent" value="freeze" />
        <input type="hidden" name="sift" value={sift.id} />
        <input type="hidden" name="temperature" value={state.temperatureK} />
        <input type="hidden" name="weights" value={state.weights} />
        <TextField
          label="Title"
          name="title"
          maxLength={200}
          autoComplete="off"
          placeholder="What is new in it"
        />
        <Field id="freeze-remark" label="Remark, for whoever reads it">
          <textarea
            id="freeze-remark"
            name="remark"
            rows={3}
            maxLength={4000}
            placeholder="What this edition is for"
            className={`${frameClass(false)} h-auto! w-full py-2`}
          />
        </Field>
        {next.findings.length > 0 ? (
          <Note tone="mark">
            {next.findings.map(({ title, text }) => (
              <p key={title}>
                <strong className="font-semibold">{title}</strong> {text}
              </p>
            ))}
            <p>The edition will say so.</p>
          </Note>
        ) : null}
        {data?.message !== undefined ? (
          <p role="alert" className="text-danger">
            {data.message}
          </p>
        ) : null}
        <DialogFoot note="An edition cannot be changed afterwards, by anyone. A mistaken one is followed by the next, which says why.">
          <SubmitButton pending={sending !== "idle"} pendingLabel="Freezing">
            Freeze edition {next.number}
          </SubmitButton>
          <DialogClose asChild>
            <Button kind="quiet">Cancel</Button>
          </DialogClose>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}

/** What goes in, as rows: what, and of what. */
function Contents({ next, last }: { next: NonNullable<HandOverView["next"]>; last: number | null }) {
  const { ensemble, result, sift, temperatureK, populations } = useWorkbench();
  if (result === null || sift === null) return null;
  const weighed =
    sift.recipe.level === null
      ? "no energies"
      : `${sift.recipe.levelName}, ${withUnit(formatTemperature(temperatureK), "K")}`;
  const rows: [string, string][] = [
    [
      plural(result.kept.length, "conformer"),
      `of ${plural(ensemble.accepted, "frame")}; ${ensemble.held === 0 ? "none held" : `${formatCount(ensemble.held)} held, named in the edition`}`,
    ],
    [weighed, populations ? `weighted by ${populations.weights.kind}` : "in file order, without populations"],
    ["Every column", "of the ensemble, with its checksum"],
    [last === null ? "The first edition" : `New since edition ${last}`, capital(next.changed.join("; "))],
  ];
  return (
    <dl className="figures border-t border-rule">
      {rows.map(([what, of]) => (
        <div key={what} className="grid gap-x-4 border-b border-rule py-2 sm:grid-cols-[11rem_minmax(0,1fr)]">
          <dt className="font-semibold">{what}</dt>
          <dd className="text-ink-2">{of}</dd>
        </div>
      ))}
    </dl>
  );
}
