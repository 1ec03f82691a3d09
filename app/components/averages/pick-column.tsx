import { useEffect, useState } from "react";
import { useFetcher } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { Checkbox } from "~/components/ui/checkbox";
import { TextField } from "~/components/ui/field";
import { BlockHead } from "~/components/ui/finding";
import { Segments } from "~/components/ui/segments";
import { SelectField } from "~/components/ui/select-field";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { useUndoAdded } from "~/hooks/use-undo-added";
import { GENERAL_SET, GENERAL_SOURCE, KARPLUS_SETS, OWN_SET } from "~/lib/averages/karplus";
import { firstUnbonded, takesPhi, whyNotGeneral } from "~/lib/averages/observable";
import { couplingWords } from "~/lib/averages/observable-words";
import { atomName } from "~/lib/chem/elements";
import { measureLabel } from "~/lib/measure/measure";
import { makeGraph } from "~/lib/structure";

/** What is picked on the structure becomes a property column: distance, angle, torsion, or a coupling by Karplus. */
export function PickColumn() {
  const { ensemble, state } = useWorkbench();
  const picked = state.atoms.filter((atom) => atom < ensemble.atoms);
  const fetcher = useFetcher<ActAnswer>();
  const undoable = useUndoAdded(ensemble.id);
  const made = fetcher.data?.ok ? fetcher.data.done?.column : undefined;
  useEffect(() => {
    if (made) undoable([made], `${made.name} is a column now.`);
  }, [made, undoable]);
  const [rule, setRule] = useState<"r-6" | "r-3" | "linear">("r-6");
  const [four, setFour] = useState<"torsion" | "coupling">("torsion");
  const graph = makeGraph(Uint8Array.from(ensemble.elements), ensemble.bonds);
  const general = picked.length === 4 ? whyNotGeneral(graph, picked) : null;
  const [set, setSet] = useState<string | null>(null);
  const chosenSet = set ?? (general === null ? GENERAL_SET : (KARPLUS_SETS[0]?.id ?? OWN_SET));
  if (!ensemble.mayCompute) return null;
  const open = picked.length === 4 ? firstUnbonded(graph, picked) : null;
  const ofFour = open === null ? four : "torsion";
  const kind =
    picked.length === 2 ? "distance" : picked.length === 3 ? "angle" : picked.length === 4 ? ofFour : null;
  const words =
    kind === "coupling" && chosenSet !== OWN_SET
      ? couplingWords(graph, picked, {
          set: chosenSet,
          own: null,
          ...(takesPhi(chosenSet, graph, picked) ? { angle: "phi" as const } : {}),
        })
      : null;
  const label = measureLabel(ensemble.elements, picked);
  return (
    <section className="mt-9 print:hidden" aria-labelledby="pick-column">
      <BlockHead id="pick-column" title="Measure on the structure" />
      {kind === null ? (
        <p className="max-w-read text-ink-2">
          Pick two atoms in the view for a distance, three for an angle, four for a torsion or a coupling, or
          name them below it. A methyl group or a ring side counts as one where its atoms are equivalent.
        </p>
      ) : (
        <fetcher.Form method="post" className="border-l-3 border-mark pl-4">
          <input type="hidden" name="intent" value="observe" />
          <input type="hidden" name="observable" value={kind} />
          <input type="hidden" name="atoms" value={picked.map((atom) => atom + 1).join(",")} />
          <p className="font-medium">
            {kind === "coupling" ? (
              <>
                <sup>3</sup>J
              </>
            ) : open === null ? (
              kind.charAt(0).toUpperCase() + kind.slice(1)
            ) : (
              "Angle between planes"
            )}{" "}
            {label}
          </p>
          {open === null ? null : (
            <p className="max-w-read text-ink-2">
              {open.map((atom) => atomName(ensemble.elements, atom)).join("–")} not bonded: an angle between
              planes, no torsion of a bond, and no coupling over three bonds.
            </p>
          )}
          <div className="mt-3 flex flex-wrap items-end gap-4">
            {picked.length === 4 && open === null ? (
              <Segments
                label="As"
                value={four}
                options={[
                  { value: "torsion", label: "Torsion" },
                  { value: "coupling", label: "Coupling" },
                ]}
                onChange={setFour}
              />
            ) : null}
            {kind === "distance" ? (
              <Segments
                label="Averaged"
                name="rule"
                value={rule}
                options={[
                  {
                    value: "r-6",
                    label: (
                      <>
                        r<sup>−6</sup>
                      </>
                    ),
                  },
                  {
                    value: "r-3",
                    label: (
                      <>
                        r<sup>−3</sup>
                      </>
                    ),
                  },
                  { value: "linear", label: "Linear" },
                ]}
                onChange={setRule}
              />
            ) : null}
            {kind === "coupling" ? (
              <SelectField
                label="Parameters"
                name="set"
                value={chosenSet}
                onChange={(event) => setSet(event.currentTarget.value)}
                className="min-w-64"
                help={
                  chosenSet === GENERAL_SET
                    ? GENERAL_SOURCE
                    : (KARPLUS_SETS.find((one) => one.id === chosenSet)?.source ?? "A, B, C in Hz")
                }
                choices={[
                  {
                    value: GENERAL_SET,
                    label: "H–C–C–H with substituents, general set",
                    disabled: general !== null,
                  },
                  ...KARPLUS_SETS.map((one) => ({ value: one.id, label: one.name })),
                  { value: OWN_SET, label: "Own A, B, C" },
                ]}
              />
            ) : null}
          </div>
          {words === null ? null : (
            <p className="mt-3 max-w-read text-xs text-ink-2">
              {words.formula}. {words.angle}
            </p>
          )}
          {kind === "coupling" && chosenSet === OWN_SET ? (
            <div className="mt-3 flex flex-wrap gap-3">
              {(["a", "b", "c"] as const).map((name) => (
                <TextField
                  key={name}
                  label={name.toUpperCase()}
                  name={name}
                  unit="Hz"
                  inputMode="decimal"
                  required
                  defaultValue={{ a: "7.76", b: "-1.10", c: "1.40" }[name]}
                  className="w-28"
                />
              ))}
            </div>
          ) : null}
          {kind === "distance" || kind === "coupling" ? (
            <>
              <Checkbox name="merge" value="on" defaultChecked className="mt-3">
                Average over equivalent atoms first (a methyl group, a ring side)
              </Checkbox>
              <p className="mt-1 max-w-read text-xs text-ink-3">
                Without it the value is that of these very atoms as the files number them, in the hand that is
                listed: where a shape stands for its mirror image too, only the average holds for both.
              </p>
            </>
          ) : null}
          <div className="mt-4 flex flex-wrap items-center gap-4">
            <SubmitButton
              kind="plain"
              pending={fetcher.state !== "idle"}
              pendingLabel="Measuring every frame…"
            >
              Make it a column
            </SubmitButton>
            <p role="status" className="text-xs text-ink-3">
              {fetcher.data?.ok
                ? "It stands in the table above, in the conformer table and in every export."
                : "Measured in every frame of the ensemble."}
            </p>
          </div>
          {fetcher.data && fetcher.data.ok !== true ? (
            <p role="alert" className="mt-3 max-w-read text-danger">
              {fetcher.data.message}
            </p>
          ) : null}
        </fetcher.Form>
      )}
    </section>
  );
}
