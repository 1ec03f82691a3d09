import { type ReactNode, useMemo } from "react";
import { CumulativePopulation } from "~/components/charts/cumulative-population";
import { EnergyLadder } from "~/components/charts/energy-ladder";
import { CopyButton } from "~/components/ui/copy-button";
import { DepthKey } from "~/components/ui/depth-key";
import { LabelledDepthStrip } from "~/components/ui/depth-strip";
import { Formula } from "~/components/ui/formula";
import { LevelName } from "~/components/ui/level-marker";
import { Note } from "~/components/ui/note";
import { FlatMoleculeDrawing } from "~/components/workbench/flat-drawing";
import { changeSentence } from "~/lib/edition/compare";
import type { EditionView } from "~/lib/edition/views";
import { formatCount, formatDateTime, formatEnergy, plural, trimmed, withUnit } from "~/lib/format";
import { byPopulation, outsideWindow } from "~/lib/workbench/conformers";
import { cumulativePopulation } from "~/lib/workbench/cumulative";
import { energyLadder } from "~/lib/workbench/ladder";
import type { EditionAddresses } from "./addresses";
import { AveragesTable } from "./averages-table";
import { Edition3D } from "./edition-3d";
import { EditionDownloads } from "./edition-downloads";
import { EditionHead } from "./edition-head";
import { MeasuredTables } from "./measured-tables";
import { PopulationTable } from "./population-table";
import { SearchesTable } from "./searches-table";
import { Shapes } from "./shapes";
import { StillPlots } from "./still-plots";
import { TemperatureTable } from "./temperature-table";

/** An edition for somebody who decides with it: what was found, how sure, by which method, and the files. */
export function EditionReport({
  edition,
  addresses,
  children,
}: {
  edition: EditionView;
  addresses: EditionAddresses;
  /** After the method: the logbook's part. */
  children?: ReactNode;
}) {
  return (
    <article>
      <Head edition={edition} />
      <Strip edition={edition} />
      <Shapes edition={edition} />
      {edition.viewable.length > 0 ? <Edition3D edition={edition} address={addresses.positions} /> : null}
      <div className="mt-10 grid gap-x-12 gap-y-10 lg:grid-cols-[minmax(0,3fr)_minmax(0,2fr)] print:grid-cols-1">
        <PopulationTable edition={edition} />
        <HowSure edition={edition} />
      </div>
      <Plots edition={edition} />
      <AveragesTable edition={edition} />
      <MeasuredTables edition={edition} />
      <TemperatureTable edition={edition} />
      <div className="mt-10 grid gap-x-12 gap-y-10 lg:grid-cols-2 print:grid-cols-1">
        <Method edition={edition} />
        <EditionDownloads edition={edition} addresses={addresses} />
      </div>
      {children}
      <p className="mt-10 border-t border-rule pt-4 text-ink-2">
        Computed estimates, to be confirmed by experiment; no basis for dosing, safety or regulatory
        decisions. Local rules and licensed practice come first. {edition.caution}
      </p>
    </article>
  );
}

const CHIRALITY = { achiral: "achiral", chiral: "chiral", unsure: "chirality unsure, taken as chiral" };

function Head({ edition }: { edition: EditionView }) {
  const { ensemble, summary } = edition;
  const positions = useMemo(
    () => (edition.shapes[0] ? Float64Array.from(edition.shapes[0].positions) : null),
    [edition.shapes],
  );
  const [first, ...more] = summary;
  return (
    <div className="grid items-end gap-x-12 gap-y-4 md:grid-cols-[minmax(0,1fr)_auto] print:grid-cols-[minmax(0,1fr)_auto]">
      <div className="max-w-[46rem]">
        <p className="figures text-xs font-medium text-ink-3">
          Edition {edition.number}, frozen {formatDateTime(edition.frozenAt)} by the team {edition.team}
        </p>
        <h1 className="mt-1 text-lg font-semibold tracking-title break-words sm:text-2xl">{ensemble.name}</h1>
        {edition.title ? <p className="mt-1 text-base text-ink-2">{edition.title}</p> : null}
        <p className="figures mt-3 text-base text-pretty sm:text-lg">{first}</p>
        {more.length > 0 ? (
          <p className="figures mt-2 text-base text-pretty text-ink-2">{more.join(" ")}</p>
        ) : null}
        {edition.number > 1 && edition.changed.length > 0 ? (
          <p className="figures mt-3 text-pretty text-ink-2">
            <strong className="font-semibold">Since the edition before.</strong>{" "}
            {changeSentence(edition.changed)}
          </p>
        ) : null}
        {edition.remark ? <Note className="mt-4 whitespace-pre-line">{edition.remark}</Note> : null}
      </div>
      <div>
        <FlatMoleculeDrawing
          elements={ensemble.elements}
          bonds={ensemble.bonds}
          positions={positions}
          name={ensemble.name}
        />
        <p className="figures mt-2 text-xs text-ink-3">
          <Formula>{ensemble.formula}</Formula>, {plural(ensemble.atoms, "atom")},{" "}
          {CHIRALITY[ensemble.chirality]}
        </p>
      </div>
    </div>
  );
}

function Strip({ edition }: { edition: EditionView }) {
  if (edition.temperature === null) return null;
  const ranked = byPopulation(edition.rows);
  return (
    <div className="mt-8">
      <LabelledDepthStrip
        shares={ranked.map((row) => row.population ?? 0)}
        names={ranked.map((row) => row.name)}
      />
      <div className="mt-2">
        <DepthKey />
      </div>
    </div>
  );
}

/** What limits the results; what nobody had settled when it was frozen stands first. */
function HowSure({ edition }: { edition: EditionView }) {
  const first = edition.findings.filter(({ kind }) => kind === "open");
  const open = [...edition.open, ...first];
  // Editions frozen earlier hold a sentence in both lists.
  const said = new Set(open.map(({ title }) => title));
  const know = edition.findings.filter(({ kind, title }) => kind === "know" && !said.has(title));
  return (
    <section aria-labelledby="edition-sure" className="min-w-0">
      <EditionHead id="edition-sure">How sure</EditionHead>
      {open.length > 0 ? (
        <>
          <h3 className="mt-3 text-sm font-semibold text-mark">Open when it was frozen</h3>
          <FindingList findings={open} open />
          {know.length > 0 ? <h3 className="mt-5 text-sm font-semibold">Good to know</h3> : null}
        </>
      ) : null}
      <FindingList findings={know} />
      <SearchesTable edition={edition} />
      <Verified edition={edition} />
    </section>
  );
}

function FindingList({
  findings,
  open = false,
}: {
  findings: readonly { title: string; text: string }[];
  open?: boolean;
}) {
  if (findings.length === 0) return null;
  return (
    <ul className="mt-2 border-t border-rule">
      {findings.map(({ title, text }) => (
        <li
          key={title}
          className={`keep figures border-b border-rule py-3 ${open ? "border-l-3 border-l-mark pl-4" : ""}`}
        >
          <strong className="font-semibold">{title}</strong> {text}
        </li>
      ))}
    </ul>
  );
}

/** How the last recomputation came out: what makes the rest worth reading. */
function Verified({ edition }: { edition: EditionView }) {
  const { verified } = edition;
  if (verified === null) return null;
  return (
    <p
      className={`keep figures mt-4 border-l-3 pl-4 ${verified.same ? "border-good-edge" : "border-danger-edge"}`}
    >
      {verified.same
        ? `Recomputed on ${formatDateTime(verified.at)}: ${verified.agree} of ${verified.files} files agree, byte for byte.`
        : `Recomputed on ${formatDateTime(verified.at)}: ${verified.agree} of ${verified.files} files agree, the others do not.`}
    </p>
  );
}

function Plots({ edition }: { edition: EditionView }) {
  const { rows, temperature, thermo } = edition;
  if (temperature === null || thermo === null) return null;
  const ladder = energyLadder(rows, temperature, null);
  const cumulative = cumulativePopulation(rows);
  return (
    <section className="mt-10" aria-label="Plots">
      <div className="still keep">
        <StillPlots rows={rows} ladder={ladder} cumulative={cumulative} />
      </div>
      <div className="moving with-script grid gap-x-10 gap-y-8 lg:grid-cols-2">
        {ladder ? (
          <EnergyLadder
            rows={rows}
            ladder={ladder}
            outside={outsideWindow(rows)}
            windowKcal={null}
            temperatureK={temperature}
            selected={NOBODY}
            onChoose={() => {}}
          />
        ) : null}
        {cumulative && ladder ? (
          <CumulativePopulation cumulative={cumulative} windowKcal={null} top={ladder.top} />
        ) : null}
      </div>
      <p className="figures mt-4 text-ink-2">
        Conformational free energy {withUnit(formatEnergy(thermo.freeEnergy), "kcal/mol")} and mean energy{" "}
        {withUnit(formatEnergy(thermo.energy), "kcal/mol")} above the lowest conformer, entropy{" "}
        {withUnit(trimmed(thermo.entropy, 2), "cal/(mol K)")}, effectively {trimmed(thermo.effectiveCount, 1)}{" "}
        equally populated states.
      </p>
    </section>
  );
}

const NOBODY: ReadonlySet<number> = new Set();

function Method({ edition }: { edition: EditionView }) {
  const [text, ...assumed] = edition.methods;
  return (
    <section className="min-w-0" aria-labelledby="edition-method">
      <EditionHead id="edition-method">Method</EditionHead>
      <p className="figures mt-3 max-w-read text-base text-pretty print:max-w-none">{text}</p>
      {assumed.map((line) => (
        <Note key={line} className="figures mt-2">
          {line}
        </Note>
      ))}
      <p className="mt-2 flex gap-4 print:hidden">
        <CopyButton as="link" text={text ?? ""}>
          Copy
        </CopyButton>
      </p>
      <h3 className="mt-5 text-sm font-semibold">To cite it</h3>
      <p className="figures mt-1 max-w-read text-xs [overflow-wrap:anywhere] text-ink-2 print:max-w-none">
        {edition.citations.text}
      </p>
      {edition.level ? (
        <p className="figures mt-4 flex flex-wrap items-center gap-x-4 text-ink-2">
          <LevelName name={edition.level.name} ordinal={edition.level.ordinal} />
          <span>
            {plural(edition.ensemble.frames, "frame")}, {formatCount(edition.ensemble.held)} held
          </span>
        </p>
      ) : null}
    </section>
  );
}
