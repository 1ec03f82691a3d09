import { useEffect, useMemo, useState } from "react";
import { useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Checkbox } from "~/components/ui/checkbox";
import { Dialog, DialogClose, DialogFoot } from "~/components/ui/dialog";
import { QuestionOption } from "~/components/ui/question-card";
import { TextButton } from "~/components/ui/text-link";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { waysToSplit } from "~/lib/averages/split-ways";
import { atomName } from "~/lib/chem/elements";
import { makeGraph } from "~/lib/structure";

const WAYS = {
  carrier: "By the atom that carries them",
  each: "Each atom on its own",
  own: "As chosen below",
};

/** Takes a group of equivalent atoms apart, for every per-atom quantity of the ensemble. */
export function SplitGroup({ atoms, name }: { atoms: readonly number[]; name: string }) {
  const { ensemble } = useWorkbench();
  const { elements, bonds } = ensemble;
  const fetcher = useFetcher<ActAnswer>();
  const [open, setOpen] = useState(false);
  const ways = useMemo(
    () => waysToSplit(makeGraph(Uint8Array.from(elements), Int32Array.from(bonds)), atoms),
    [elements, bonds, atoms],
  );
  const [way, setWay] = useState<keyof typeof WAYS>(ways[0]?.way ?? "each");
  const [second, setSecond] = useState<ReadonlySet<number>>(new Set());
  const done = fetcher.state === "idle" && fetcher.data?.ok === true;
  useEffect(() => {
    if (done) setOpen(false);
  }, [done]);
  const own = [atoms.filter((atom) => !second.has(atom)), atoms.filter((atom) => second.has(atom))];
  const parts = way === "own" ? own : (ways.find((one) => one.way === way)?.parts ?? own);
  const nameOf = (atom: number) => atomName(elements, atom);
  const words = (list: readonly (readonly number[])[]) =>
    list.map((part) => part.map(nameOf).join(", ")).join(" | ");
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={<TextButton aria-label={`Split ${name}`}>Split</TextButton>}
      title={`Take ${name} apart`}
      description="Equivalent atoms share one signal as long as whatever carries them turns faster than the experiment looks. An amide nitrogen or a hindered rotor may be slower: then each part is a signal of its own. Hands at centres are told in every frame; which side of a flat group an atom stands on is taken from the numbers of the file, so that all frames have to number it alike."
    >
      <fetcher.Form method="post" className="grid gap-4">
        <input type="hidden" name="intent" value="split" />
        <input
          type="hidden"
          name="parts"
          value={parts.map((part) => part.map((atom) => atom + 1).join(",")).join(";")}
        />
        <fieldset className="rounded-md border border-rule">
          <legend className="sr-only">How the atoms part</legend>
          {[...ways, ...(atoms.length > 2 ? [{ way: "own" as const, parts: own }] : [])].map((one) => (
            <QuestionOption
              key={one.way}
              name="way"
              value={one.way}
              checked={one.way === way}
              onChange={() => setWay(one.way)}
              title={WAYS[one.way]}
              reason={one.way === "own" ? undefined : words(one.parts)}
            />
          ))}
        </fieldset>
        {way === "own" ? (
          <fieldset>
            <legend className="mb-2 text-ink-2">These make the second signal</legend>
            <div className="flex flex-wrap gap-x-5 gap-y-2">
              {atoms.map((atom) => (
                <Checkbox
                  key={atom}
                  checked={second.has(atom)}
                  onChange={(event) => {
                    const next = new Set(second);
                    if (event.currentTarget.checked) next.add(atom);
                    else next.delete(atom);
                    setSecond(next);
                  }}
                >
                  {nameOf(atom)}
                </Checkbox>
              ))}
            </div>
          </fieldset>
        ) : null}
        {fetcher.data && fetcher.data.ok !== true ? (
          <p role="alert" className="text-danger">
            {fetcher.data.message}
          </p>
        ) : null}
        <DialogFoot note="Holds for every per-atom quantity of this ensemble and for everybody, stands in the logbook, and can be undone.">
          <SubmitButton
            pending={fetcher.state !== "idle"}
            pendingLabel="Taking apart…"
            disabled={parts.some((part) => part.length === 0)}
          >
            Make it {parts.length} signals
          </SubmitButton>
          <DialogClose asChild>
            <Button kind="quiet">Cancel</Button>
          </DialogClose>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}

/** A row that is part of a group taken apart: puts the group together again. */
export function JoinGroup({ atom, name }: { atom: number; name: string }) {
  const fetcher = useFetcher<ActAnswer>();
  return (
    <fetcher.Form method="post" className="inline print:hidden">
      <input type="hidden" name="intent" value="join" />
      <input type="hidden" name="atom" value={atom + 1} />
      <TextButton type="submit" aria-label={`Put ${name} together again`} disabled={fetcher.state !== "idle"}>
        Put together
      </TextButton>
      {fetcher.data && fetcher.data.ok !== true && fetcher.state === "idle" ? (
        <span role="alert" className="text-danger">
          {" "}
          {fetcher.data.message}
        </span>
      ) : null}
    </fetcher.Form>
  );
}
