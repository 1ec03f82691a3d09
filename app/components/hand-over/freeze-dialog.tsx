import { useEffect, useMemo, useState } from "react";
import { useFetcher, useLocation } from "react-router";
import { useAveragesState } from "~/components/averages/use-averages-state";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogClose, DialogFoot } from "~/components/ui/dialog";
import { Field, frameClass, TextField } from "~/components/ui/field";
import { TextLink } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { DEFAULT_SEED } from "~/lib/averages/uncertainty";
import type { OpenItem } from "~/lib/edition/content";
import { lowestItems } from "~/lib/edition/open";
import { drawUncertainty } from "~/lib/edition/uncertainty";
import type { HandOverView } from "~/lib/edition/views";
import {
  capital,
  countWord,
  formatCount,
  formatEnergy,
  formatTemperature,
  plural,
  withUnit,
} from "~/lib/format";
import { conformerName } from "~/lib/workbench/conformers";
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
        <ErrorFields sigma={next.sigma} />
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
        <OpenList next={next} />
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

/** Level error and temperatures as the sections Averages and Trust have them in the address. */
function ErrorFields({ sigma }: { sigma: number | null }) {
  const [{ temperatures, sigmaFrom }] = useAveragesState();
  return (
    <>
      <input type="hidden" name="sigma" value={sigma ?? ""} />
      <input type="hidden" name="sigmaFrom" value={sigmaFrom ?? ""} />
      <input type="hidden" name="temperatures" value={temperatures.join(",")} />
    </>
  );
}

/** What is not settled, each with the section where it can be; freezing is allowed all the same. */
function OpenList({ next }: { next: NonNullable<HandOverView["next"]> }) {
  const { ensemble } = useWorkbench();
  const { search } = useLocation();
  const items = [...next.open, ...useLowestItems(next.sigma)];
  if (items.length === 0) return null;
  return (
    <section aria-labelledby="freeze-open" className="border-l-3 border-mark pl-4">
      <h3 id="freeze-open" className="text-sm font-semibold">
        Still open: {countWord(items.length)}
      </h3>
      <ul className="figures mt-1 max-h-64 overflow-y-auto text-sm">
        {items.map(({ title, text, section }) => (
          <li key={title} className="py-1">
            <strong className="font-semibold">{title}</strong> {text}
            {section === null ? null : (
              <>
                {" "}
                <TextLink to={{ pathname: `/ensembles/${ensemble.id}/${section}`, search }}>
                  {SECTION_WORDS[section] ?? "Look at it"}
                </TextLink>
              </>
            )}
          </li>
        ))}
      </ul>
      <p className="mt-1 text-xs text-ink-3">
        You can freeze all the same: the edition keeps this list and shows it.
      </p>
    </section>
  );
}

const SECTION_WORDS: Record<string, string> = {
  intake: "Go to Intake",
  "distinct-set": "Go to Distinct set",
  populations: "Go to Populations",
  levels: "Go to Levels",
  trust: "Go to Trust",
};

/** Which shape is the lowest, if the draws leave it open: the draws that the edition will hold. */
function useLowestItems(sigma: number | null): OpenItem[] {
  const { result, populations, temperatureK } = useWorkbench();
  return useMemo(() => {
    const kept = result?.kept ?? [];
    if (populations === null || sigma === null || sigma === 0 || kept.length < 2) return [];
    const energies = kept.map(({ relativeEnergy }) => relativeEnergy ?? 0);
    const drawn = drawUncertainty({
      ...{ energies, sigma, temperatureK, seed: DEFAULT_SEED, moments: [] },
      weights: Array.from(populations.weights.values),
    });
    return lowestItems({ names: kept.map((_, row) => conformerName(row)), energies, drawn });
  }, [result, populations, temperatureK, sigma]);
}

/** What goes in, as rows: what, and of what. */
function Contents({ next, last }: { next: NonNullable<HandOverView["next"]>; last: number | null }) {
  const { ensemble, result, sift, temperatureK, populations } = useWorkbench();
  const [{ temperatures }] = useAveragesState();
  if (result === null || sift === null) return null;
  const weighed =
    sift.recipe.level === null
      ? "no energies"
      : `${sift.recipe.levelName}, ${withUnit(formatTemperature(temperatureK), "K")}`;
  const others = temperatures.filter((kelvin) => kelvin !== temperatureK).map(formatTemperature);
  const rows: [string, string][] = [
    [
      plural(result.kept.length, "conformer"),
      `of ${plural(ensemble.accepted, "frame")}; ${ensemble.held === 0 ? "none held" : `${formatCount(ensemble.held)} held, named in the edition`}`,
    ],
    [weighed, populations ? `weighted by ${populations.weights.kind}` : "in file order, without populations"],
    ...(next.sigma === null
      ? []
      : ([
          [
            `± ${withUnit(formatEnergy(next.sigma), "kcal/mol")}`,
            `as the error of the level: 95 % ranges${others.length === 0 ? "" : `; also at ${withUnit(others.join(", "), "K")}`}`,
          ],
        ] satisfies [string, string][])),
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
