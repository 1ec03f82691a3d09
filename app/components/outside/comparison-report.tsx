import { href, Link, useLocation } from "react-router";
import { CopyButton } from "~/components/ui/copy-button";
import { BlockHead, Finding } from "~/components/ui/finding";
import { KeyFigure, KeyFigures } from "~/components/ui/key-figures";
import { Note } from "~/components/ui/note";
import { NumberField } from "~/components/ui/number-field";
import { Segments } from "~/components/ui/segments";
import { SelectField } from "~/components/ui/select-field";
import { linkClass } from "~/components/ui/text-link";
import { SettingsStrip } from "~/components/workbench/settings-strip";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { fixed, formatEnergy, plural, withUnit } from "~/lib/format";
import { measureLabel } from "~/lib/measure/measure";
import { OUTSIDE_SETS, type OutsideChoice, writeOutsideChoice } from "~/lib/outside/choice";
import { smallerSet } from "~/lib/outside/compare-outside";
import { outsideFinding } from "~/lib/outside/finding";
import { outsideMethods } from "~/lib/outside/methods-text";
import { type AtomSet, makeGraph, selectAtoms } from "~/lib/structure";
import { thermalEnergyKcal } from "~/lib/units";
import { searchOf } from "~/lib/url-state";
import { ATOM_SET_WORDS } from "~/lib/workbench/recipe-words";
import type { OutsideView } from "~/services/outside/list-outside.server";
import { NearestTable } from "./nearest-table";
import { NearnessAgainstEnergy } from "./nearness-against-energy";
import { OutsideTorsions } from "./outside-view";
import { StrainChart } from "./strain-chart";
import type { Comparison } from "./use-comparison";

const SET_NAMES: Record<AtomSet, string> = {
  heavy: "Heavy",
  "heavy+polarH": "Heavy and polar H",
  all: "All",
};
/** kcal/mol; beyond it an energy has hardly the same level, unit and atoms. */
const HARDLY_STRAIN = 100;

interface Props {
  comparison: Comparison;
  structures: readonly OutsideView[];
  choice: OutsideChoice;
  change: (part: Partial<OutsideChoice>) => void;
}

/** What comes of comparing one structure: the finding, figures, charts and table. */
export function ComparisonReport(props: Props) {
  const { comparison, choice, change } = props;
  const { structure, near, over, labels, fits, otherConfiguration } = comparison;
  const { ensemble, rows, temperatureK } = useWorkbench();
  const [nearest = over] = near;
  const { strain, carries, why } = useStrain(comparison);
  const torsions = fits.find(({ frame }) => frame === nearest.frame)?.torsions ?? [];
  const otherHand = near.find(({ frame }) => frame === comparison.otherHand) ?? null;
  const said = { strain, near: choice.near, torsions, labels, otherHand };
  const finding = outsideFinding(structure.name, near, said);
  const cost = nearest.population ? -thermalEnergyKcal(temperatureK) * Math.log(nearest.population) : null;
  return (
    <>
      {finding === null ? null : <Finding more={finding.second}>{finding.text}</Finding>}
      <Settings {...props} />
      {otherConfiguration.length > 0 ? (
        <Note tone="mark" className="mt-4">
          It has another configuration at{" "}
          {measureLabel(ensemble.elements, otherConfiguration).replaceAll("–", ", ")}: it is another
          stereoisomer of this molecule. Its energy and shape are not those of a conformer.
        </Note>
      ) : null}
      {structure.data.remarks.map((remark) => (
        <p key={remark} className="mt-3 text-xs text-ink-2">
          {remark}
        </p>
      ))}
      {carries && strain === null ? (
        <Note tone="remark" className="mt-4">
          {why}
        </Note>
      ) : null}
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
        <KeyFigure label={`Cost of choosing ${nearest.name}`} value={formatEnergy(cost)} unit="kcal/mol" />
      </KeyFigures>
      {strain !== null && Math.abs(strain) > HARDLY_STRAIN ? (
        <Note tone="remark" className="mt-4">
          {withUnit(formatEnergy(strain), "kcal/mol")} is hardly a strain: see whether the energy of the
          structure has the unit, the level and the atoms of the ensemble’s.
        </Note>
      ) : null}
      <div className="mt-9 grid gap-x-10 gap-y-9 xl:grid-cols-[minmax(0,1fr)_minmax(0,0.9fr)]">
        {nearest.relativeEnergy !== null ? (
          <NearnessAgainstEnergy
            rows={near}
            near={choice.near}
            shown={over.frame}
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
        ) : carries ? null : (
          <Note className="self-start">{why}</Note>
        )}
      </div>
      <NearestTable comparison={comparison} choice={choice} onOver={(frame) => change({ over: frame })} />
      {near.length < rows.length ? (
        <p className="mt-2 text-xs text-ink-3">
          The lowest {plural(near.length, "conformer")} of {rows.length} were compared.
        </p>
      ) : null}
      {/* Beside the view where there is room for it. */}
      <div className="mt-9 lg:hidden">
        <OutsideTorsions />
      </div>
      <Method
        comparison={comparison}
        strainLevel={strain === null ? null : (structure.strain?.levelName ?? null)}
      />
    </>
  );
}

/** kcal/mol at the level of the relative energies, or in words why it is not known and whether an energy is left unused. */
function useStrain({ structure, near, otherConfiguration }: Comparison): {
  strain: number | null;
  carries: boolean;
  why: string;
} {
  const { sift } = useWorkbench();
  const found = structure.strain;
  if (found === null) {
    return { strain: null, carries: structure.data.energy !== null, why: structure.withoutStrain ?? "" };
  }
  const number = `It carries an energy at ${found.levelName}, ${withUnit(formatEnergy(found.kcal), "kcal/mol")} above the lowest there`;
  const without = (because: string) => ({ strain: null, carries: true, why: `${number}; ${because}.` });
  if (otherConfiguration.length > 0)
    return without("it is that of another stereoisomer, so no strain is taken from it");
  if (sift?.recipe.level == null) return without("the set shown was sifted without energies");
  if (found.levelId !== sift.recipe.level) return without("the set shown is ordered by another level");
  if (near[0]?.relativeEnergy == null) return without("the nearest conformer has none to compare it with");
  return { strain: found.kcal, carries: true, why: "" };
}

function Method({ comparison, strainLevel }: { comparison: Comparison; strainLevel: string | null }) {
  const { ensemble } = useWorkbench();
  const { structure, set, near, countMirror } = comparison;
  const graph = makeGraph(Uint8Array.from(ensemble.elements), ensemble.bonds);
  const text = outsideMethods({
    name: structure.name,
    sha256: structure.sha256,
    set,
    atoms: selectAtoms(graph, set).length,
    conformers: near.length,
    mirror: countMirror,
    strainLevel,
  });
  return (
    <div className="mt-9">
      <BlockHead title="Methods text">
        <CopyButton text={text}>Copy</CopyButton>
      </BlockHead>
      <p className="figures max-w-read text-pretty">{text}</p>
    </div>
  );
}

function Settings({ comparison, structures, choice, change }: Props) {
  const { ensemble } = useWorkbench();
  const { structure, set, countMirror } = comparison;
  const allowed = OUTSIDE_SETS.filter((one) => smallerSet(one, structure.data.atoms) === one);
  const words = `${structure.name}, compared on ${ATOM_SET_WORDS[set]}, mirror images ${countMirror ? "counted" : "left out"}; near is up to ${withUnit(fixed(choice.near, 3), "Å")}.`;
  return (
    <>
      <SettingsStrip columns="sm:grid-cols-2 xl:grid-cols-[minmax(0,1fr)_auto_auto_8rem]" words={words}>
        <SelectField
          label="Outside structure"
          value={structure.id}
          choices={structures.map(({ id, name }) => ({ value: id, label: name }))}
          onChange={(event) => change({ outside: event.currentTarget.value, over: null })}
        />
        <Segments
          label="Atoms compared"
          value={set}
          options={OUTSIDE_SETS.map((one) => ({
            value: one,
            label: SET_NAMES[one],
            disabled: !allowed.includes(one),
          }))}
          onChange={(next) => change({ set: next })}
        />
        <Segments
          label="Mirror images"
          value={countMirror ? "count" : "same"}
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
      </SettingsStrip>
      <OtherStructures chosen={structure.id} structures={structures} choice={choice} />
    </>
  );
}

/** Without script the structures are links; with it the field above chooses. */
function OtherStructures({
  chosen,
  structures,
  choice,
}: {
  chosen: string;
  structures: readonly OutsideView[];
  choice: OutsideChoice;
}) {
  const { ensemble } = useWorkbench();
  const { search } = useLocation();
  const others = structures.filter(({ id }) => id !== chosen);
  if (others.length === 0) return null;
  const pathname = href("/ensembles/:id/compare", { id: ensemble.id });
  return (
    <p className="mt-2 hidden flex-wrap gap-x-4 gap-y-1 noscript:flex print:hidden">
      Others:
      {others.map(({ id, name }) => (
        <Link
          key={id}
          className={linkClass}
          to={{
            pathname,
            search: searchOf(
              writeOutsideChoice({ ...choice, outside: id, over: null }, new URLSearchParams(search)),
            ),
          }}
        >
          {name}
        </Link>
      ))}
    </p>
  );
}
