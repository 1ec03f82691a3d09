import { useCallback, useEffect, useMemo, useRef, useState } from "react";
import { href, useFetcher, useLocation, useNavigate } from "react-router";
import { Button } from "~/components/ui/button";
import { BlockHead, Finding, SectionHead } from "~/components/ui/finding";
import { KeyFigure, KeyFigures } from "~/components/ui/key-figures";
import { Note } from "~/components/ui/note";
import { NumberField } from "~/components/ui/number-field";
import { Segments } from "~/components/ui/segments";
import { SelectField } from "~/components/ui/select-field";
import { TextLink } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import { SectionState } from "~/components/workbench/section-state";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { useOutside } from "~/hooks/use-outside";
import { setOutsideShown } from "~/hooks/use-outside-view";
import { fixed, formatChecksum, formatEnergy, plural, withUnit } from "~/lib/format";
import { measureLabel } from "~/lib/measure/measure";
import { compareTorsions, mainTorsions, OutsideComparer, smallerSet } from "~/lib/outside/compare-outside";
import { nearestRows, type OutsideRow, outsideFinding } from "~/lib/outside/finding";
import { type AtomSet, makeGraph, selectAtoms } from "~/lib/structure";
import { thermalEnergyKcal } from "~/lib/units";
import { searchOf } from "~/lib/url-state";
import { ATOM_SET_WORDS } from "~/lib/workbench/recipe-words";
import type { OutsideView } from "~/services/outside/list-outside.server";
import { AddStructure, type OutsideAnswerToForm } from "./add-structure";
import { NearestTable } from "./nearest-table";
import { NearnessAgainstEnergy } from "./nearness-against-energy";
import { StrainChart } from "./strain-chart";

const NEAR = 0.5;
const SETS: readonly AtomSet[] = ["heavy", "heavy+polarH", "all"];
const SET_NAMES: Record<AtomSet, string> = {
  heavy: "Heavy",
  "heavy+polarH": "Heavy and polar H",
  all: "All",
};

/** What is compared, in the address beside the rest. */
interface Choice {
  outside: string | null;
  set: AtomSet;
  mirror: boolean;
  near: number;
  /** Frame that is laid over; null: the nearest. */
  over: number | null;
}

function useChoice(): [Choice, (part: Partial<Choice>) => void] {
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const params = new URLSearchParams(search);
  const near = Number(params.get("near"));
  const over = Number(params.get("over"));
  const choice: Choice = {
    outside: params.get("outside"),
    set: SETS.find((one) => one === params.get("set")) ?? "heavy",
    mirror: params.get("hand") !== "same",
    near: near > 0 && near <= 100 ? near : NEAR,
    over: Number.isInteger(over) && over > 0 ? over : null,
  };
  const change = (part: Partial<Choice>) => {
    const next = { ...choice, ...part };
    const write = (key: string, value: string | null) =>
      value === null ? params.delete(key) : params.set(key, value);
    write("outside", next.outside);
    write("set", next.set === "heavy" ? null : next.set);
    write("hand", next.mirror ? null : "same");
    write("near", next.near === NEAR ? null : String(next.near));
    write("over", next.over === null ? null : String(next.over));
    void navigate({ pathname, search: searchOf(params) }, { preventScrollReset: true });
  };
  return [choice, change];
}

/** A crystal or bound pose beside the distinct set: which conformers are like it, and what it costs to be it. */
export function CompareSection({ structures }: { structures: readonly OutsideView[] }) {
  const { ensemble, result } = useWorkbench();
  const { search } = useLocation();
  const [choice, change] = useChoice();
  const chosen = structures.find(({ id }) => id === choice.outside) ?? structures.at(-1) ?? null;
  const [adding, setAdding] = useState(false);
  const remove = useRemoval(ensemble.id, (id) => change({ outside: id, over: null }));
  const added = useRef(change);
  added.current = change;
  const onAdded = useCallback((id: string) => {
    setAdding(false);
    added.current({ outside: id, over: null });
  }, []);
  const back = { pathname: href("/ensembles/:id/distinct-set", { id: ensemble.id }), search };
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Against an outside structure"
        aside={<TextLink to={`${back.pathname}${back.search}`}>Back to the distinct set</TextLink>}
      />
      {result === null ? (
        <SectionState />
      ) : (
        <>
          {chosen === null ? (
            <Finding more="A crystal or a bound pose is laid against the conformers: which is nearest, what it costs, and how much of it the flask holds.">
              No structure from outside lies beside this ensemble.
            </Finding>
          ) : (
            <Comparison
              key={chosen.id}
              structure={chosen}
              structures={structures}
              choice={choice}
              change={change}
            />
          )}
          {ensemble.mayCompute ? (
            <div className="mt-9 print:hidden">
              <BlockHead title={chosen === null ? "Add a structure" : "Other structures"}>
                {chosen !== null ? (
                  <>
                    <Button size="sm" aria-expanded={adding} onClick={() => setAdding(!adding)}>
                      Add another structure
                    </Button>
                    <Button size="sm" kind="quiet" onClick={() => remove(chosen)}>
                      Delete {chosen.name}
                    </Button>
                  </>
                ) : null}
              </BlockHead>
              {chosen === null || adding ? <AddStructure levels={ensemble.levels} onAdded={onAdded} /> : null}
            </div>
          ) : chosen === null ? (
            <p className="mt-4 text-ink-2">An analyst or an owner of the team can add one.</p>
          ) : null}
        </>
      )}
    </section>
  );
}

/** Takes a structure away and offers it back. */
function useRemoval(ensembleId: string, onBack: (id: string) => void) {
  const fetcher = useFetcher<OutsideAnswerToForm>();
  const told = useRef<OutsideAnswerToForm | undefined>(undefined);
  const last = useRef<{ id: string; undo: boolean } | null>(null);
  const action = href("/ensembles/:id/compare", { id: ensembleId });
  const { data, submit } = fetcher;
  useEffect(() => {
    if (!data || told.current === data) return;
    told.current = data;
    const done = last.current;
    if (!data.ok || done === null) showToast({ tone: "failed", text: data.message ?? "Not deleted." });
    else if (done.undo) {
      showToast({ tone: "done", text: `${data.name} is back.` });
      onBack(done.id);
    } else {
      document.getElementById("content")?.focus({ preventScroll: true });
      showToast({
        tone: "done",
        text: `${data.name} deleted.`,
        action: {
          label: "Undo",
          act: () => {
            last.current = { id: done.id, undo: true };
            void submit({ intent: "restore", outside: done.id }, { method: "post", action });
          },
        },
      });
    }
  }, [data, submit, action, onBack]);
  return ({ id }: OutsideView) => {
    last.current = { id, undo: false };
    void submit({ intent: "remove", outside: id }, { method: "post", action });
  };
}

function Comparison({
  structure,
  structures,
  choice,
  change,
}: {
  structure: OutsideView;
  structures: readonly OutsideView[];
  choice: Choice;
  change: (part: Partial<Choice>) => void;
}) {
  const { ensemble, rows, sift, coordinates, measured, temperatureK } = useWorkbench();
  const { data } = structure;
  const set = smallerSet(choice.set, data.atoms);
  const graph = useMemo(() => makeGraph(Uint8Array.from(ensemble.elements), ensemble.bonds), [ensemble]);
  const outside = useMemo(() => ({ positions: inEnsembleOrder(data), atoms: data.atoms }), [data]);
  const compared = useMemo(() => rows.filter((row) => measured.has(row.frame)), [rows, measured]);
  const frames = useMemo(() => compared.map((row) => row.frame), [compared]);
  const found = useOutside(
    sift === null ? null : `${structure.id} ${set} ${sift.id}`,
    frames,
    coordinates.positions,
    { elements: ensemble.elements, bonds: ensemble.bonds, outside, atoms: set },
  );
  const countMirror = choice.mirror && ensemble.chirality === "achiral";
  const near = useMemo(
    () => (found === null ? [] : nearestRows(compared, found, countMirror)),
    [compared, found, countMirror],
  );
  const comparer = useMemo(() => new OutsideComparer(graph, outside, set), [graph, outside, set]);
  const torsions = useMemo(() => mainTorsions(graph), [graph]);
  const labels = torsions.map((atoms) => measureLabel(ensemble.elements, atoms));
  const fitOf = useCallback(
    (row: OutsideRow) => {
      const conformer = coordinates.positions.get(row.frame);
      if (!conformer) return null;
      const fitted = comparer.fit(conformer, row.mirror);
      return { conformer, fitted, torsions: compareTorsions(torsions, conformer, fitted, row.mirror) };
    },
    [comparer, coordinates.positions, torsions],
  );
  const over = near.find((row) => row.frame === choice.over) ?? near[0] ?? null;
  const nearest = near[0] ?? null;
  const overFit = useMemo(() => (over === null ? null : fitOf(over)), [over, fitOf]);
  const nearestFit = useMemo(() => (nearest === null ? null : fitOf(nearest)), [nearest, fitOf]);
  const otherHands = useMemo(
    () =>
      nearestFit === null
        ? []
        : comparer.otherConfiguration(nearestFit.conformer, comparer.fit(nearestFit.conformer, false)),
    [comparer, nearestFit],
  );
  useShown(structure.name, over, overFit, set, graph, labels);

  const strain =
    structure.strain !== null && structure.strain.levelId === sift?.recipe.level
      ? structure.strain.kcal
      : null;
  const finding =
    nearest === null || nearestFit === null
      ? null
      : outsideFinding(structure.name, near, {
          strain,
          near: choice.near,
          torsions: nearestFit.torsions,
          labels,
        });
  const cost = nearest?.population ? -thermalEnergyKcal(temperatureK) * Math.log(nearest.population) : null;
  return (
    <>
      {finding === null ? (
        <p role="status" className="appear-late mt-2 text-ink-2">
          {coordinates.missing > 0
            ? `${plural(coordinates.missing, "structure")} on the way.`
            : `Comparing ${plural(compared.length, "conformer")} with ${structure.name}.`}
        </p>
      ) : (
        <Finding more={finding.second}>{finding.text}</Finding>
      )}
      <Settings {...{ structure, structures, choice, change, set }} />
      {otherHands.length > 0 ? (
        <Note tone="mark" className="mt-4">
          It has another configuration at {measureLabel(ensemble.elements, otherHands).replaceAll("–", ", ")}:
          it is another stereoisomer of this molecule. Its energy and shape are not those of a conformer.
        </Note>
      ) : null}
      {data.remarks.map((remark) => (
        <p key={remark} className="mt-3 text-xs text-ink-2">
          {remark}
        </p>
      ))}
      {nearest === null ? null : (
        <>
          <KeyFigures>
            <KeyFigure
              label="Nearest"
              value={nearest.name}
              unit={withUnit(`${nearest.exact ? "" : "at most "}${fixed(nearest.rmsd, 3)}`, "Å")}
            />
            <KeyFigure
              label={`${nearest.name} above the lowest`}
              value={formatEnergy(nearest.relativeEnergy)}
              unit="kcal/mol"
            />
            {strain !== null && nearest.relativeEnergy !== null ? (
              <>
                <KeyFigure
                  label={`Structure above ${nearest.name}`}
                  value={formatEnergy(strain - nearest.relativeEnergy)}
                  unit="kcal/mol"
                />
                <KeyFigure
                  label="Strain, together"
                  value={formatEnergy(strain)}
                  unit="kcal/mol"
                  source={{
                    name: `Strain of ${structure.name}`,
                    value: withUnit(formatEnergy(strain), "kcal/mol"),
                    raw: strain,
                    formula: "energy of the outside structure − energy of the lowest accepted frame",
                    inputs: [{ label: "level", value: structure.strain?.levelName }],
                  }}
                />
              </>
            ) : null}
            <KeyFigure
              label={`Cost of choosing ${nearest.name}`}
              value={formatEnergy(cost)}
              unit="kcal/mol"
            />
          </KeyFigures>
          <div className="mt-9 grid gap-x-10 gap-y-9 xl:grid-cols-[minmax(0,1fr)_minmax(0,0.9fr)]">
            {nearest.relativeEnergy !== null ? (
              <NearnessAgainstEnergy
                rows={near}
                near={choice.near}
                shown={over?.frame ?? null}
                onChoose={(frame) => change({ over: frame })}
              />
            ) : null}
            {strain !== null && nearest.relativeEnergy !== null ? (
              <StrainChart
                level={structure.strain?.levelName ?? ""}
                nearest={{ ...nearest, relativeEnergy: nearest.relativeEnergy }}
                strain={strain}
                note="One energy as it stands, compared with relaxed conformers: part of it is strain, part is that nobody relaxed it. Cost of choosing: −RT ln p, what it takes to hold the flask in that one conformer. The level’s own error is not in these figures."
              />
            ) : (
              <Note className="self-start">
                {structure.strain !== null
                  ? `It carries an energy at ${structure.strain.levelName}, ${withUnit(formatEnergy(structure.strain.kcal), "kcal/mol")} above the lowest there; the set shown is ordered by another level.`
                  : "It carries no energy at a level of this ensemble, so its strain is not known."}
              </Note>
            )}
          </div>
          <NearestTable
            rows={near}
            over={over}
            near={choice.near}
            fitOf={fitOf}
            labels={labels}
            onOver={(frame) => change({ over: frame })}
          />
          {compared.length < rows.length ? (
            <p className="mt-2 text-xs text-ink-3">
              The lowest {plural(compared.length, "conformer")} of {rows.length} were compared.
            </p>
          ) : null}
          <p className="mt-4 text-xs text-ink-3">
            {structure.name}, SHA-256 {formatChecksum(structure.sha256)}, mapped by its bonds, compared on{" "}
            {plural(comparer.plan.n, "atom")} ({ATOM_SET_WORDS[set]}), equivalent atoms exchanged, proper
            rotations
            {countMirror ? "; mirror images counted, as the molecule is achiral" : ""}.
          </p>
        </>
      )}
    </>
  );
}

/** Hands the fit to the view beside the section. */
function useShown(
  name: string,
  over: OutsideRow | null,
  fit: { conformer: Float64Array; fitted: Float64Array; torsions: ReturnType<typeof compareTorsions> } | null,
  set: AtomSet,
  graph: ReturnType<typeof makeGraph>,
  labels: readonly string[],
) {
  const text = labels.join();
  // biome-ignore lint/correctness/useExhaustiveDependencies: the text stands for the labels
  useEffect(() => {
    if (over === null || fit === null) {
      setOutsideShown(null);
      return;
    }
    const atoms = selectAtoms(graph, set);
    const visible = new Set(atoms);
    const bonds: number[] = [];
    for (let k = 0; k < graph.bonds.length; k += 2) {
      const [a = 0, b = 0] = [graph.bonds[k], graph.bonds[k + 1]];
      if (visible.has(a) && visible.has(b)) bonds.push(a, b);
    }
    setOutsideShown({
      frame: over.frame,
      name: over.name,
      positions: fit.conformer,
      population: over.population,
      ghost: { positions: fit.fitted, atoms, bonds },
      caption: {
        strong: over.name,
        rest: `in atom colours, ${name} dashed${over.mirror ? " as its mirror image" : ""}; ${plural(atoms.length, "atom")}, RMSD ${withUnit(fixed(over.rmsd, 3), "Å")}`,
      },
      torsions: fit.torsions,
      labels,
    });
    return () => setOutsideShown(null);
  }, [name, over, fit, set, graph, text]);
}

function Settings({
  structure,
  structures,
  choice,
  change,
  set,
}: {
  structure: OutsideView;
  structures: readonly OutsideView[];
  choice: Choice;
  change: (part: Partial<Choice>) => void;
  set: AtomSet;
}) {
  const { ensemble } = useWorkbench();
  const allowed = SETS.filter((one) => smallerSet(one, structure.data.atoms) === one);
  return (
    <div className="mt-6 grid gap-x-6 gap-y-4 border-y border-rule py-4 sm:grid-cols-2 xl:grid-cols-[minmax(0,1fr)_auto_auto_8rem]">
      <SelectField
        label="Outside structure"
        value={structure.id}
        choices={structures.map(({ id, name }) => ({ value: id, label: name }))}
        onChange={(event) => change({ outside: event.currentTarget.value, over: null })}
      />
      <Segments
        label="Atoms compared"
        value={set}
        options={SETS.map((one) => ({ value: one, label: SET_NAMES[one], disabled: !allowed.includes(one) }))}
        onChange={(next) => change({ set: next })}
      />
      <Segments
        label="Mirror images"
        value={ensemble.chirality === "achiral" && choice.mirror ? "count" : "same"}
        options={[
          { value: "count", label: "Count", disabled: ensemble.chirality !== "achiral" },
          { value: "same", label: "Leave out" },
        ]}
        onChange={(next) => change({ mirror: next === "count" })}
      />
      <NumberField
        label="Near, up to"
        value={choice.near}
        min={0}
        max={100}
        above
        step={0.05}
        unit="Å"
        write={(value) => fixed(value, 3)}
        wrong="A distance above 0 Å, for example 0.500."
        onCommit={(near) => near !== null && change({ near })}
      />
    </div>
  );
}

/** Coordinates in the atom order of the ensemble; what stands at hydrogens that are not there is not read. */
function inEnsembleOrder({ map, positions }: OutsideView["data"]): Float64Array {
  const out = new Float64Array(3 * map.length);
  for (const [atom, from] of map.entries()) {
    if (from >= 0) out.set(positions.slice(3 * from, 3 * from + 3), 3 * atom);
  }
  return out;
}
