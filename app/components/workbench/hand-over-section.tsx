import { Download } from "lucide-react";
import type { ReactNode } from "react";
import { href } from "react-router";
import { buttonClass } from "~/components/ui/button";
import { CopyButton } from "~/components/ui/copy-button";
import { Facts } from "~/components/ui/facts";
import { BlockHead, Finding, SectionHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextLink } from "~/components/ui/text-link";
import {
  fixed,
  formatBytes,
  formatChecksum,
  formatCount,
  formatDateTime,
  formatEnergy,
  formatSeconds,
  formatTemperature,
  plural,
  withUnit,
} from "~/lib/format";
import type { SiftRecipe } from "~/lib/recipe/recipe";
import { CONSTANTS_YEAR } from "~/lib/units";
import { ATOM_SET_WORDS, methodsText } from "~/lib/workbench/recipe-words";
import type { ExportFacts } from "~/services/sifts/describe-exports.server";
import { OutdatedNote, SectionState } from "./section-state";
import { useWorkbench } from "./workbench-context";

type Format = "csv" | "xyz" | "sdf" | "json";

/** The distinct set as files for the spreadsheet, the next program and a script, and how it was made. */
export function HandOverSection({ files }: { files: readonly ExportFacts[] | null }) {
  const { ensemble, sift, result, populations, temperatureK, level, state } = useWorkbench();
  if (sift === null || result === null) {
    return (
      <section aria-labelledby="section-title">
        <SectionHead id="section-title" title="Hand-over" />
        <SectionState />
      </section>
    );
  }
  const text = methodsText({
    ensemble,
    recipe: sift.recipe,
    result,
    energyKind: level?.energyKind ?? null,
    weights: populations?.weights ?? null,
    temperatureK,
  });
  const energies = sift.recipe.level !== null;
  return (
    <section aria-labelledby="section-title">
      <SectionHead id="section-title" title="Hand-over" />
      <Finding
        more={
          energies
            ? `Populations in the files are those at ${withUnit(formatTemperature(temperatureK), "K")}${state.weights === "auto" ? "" : ", with the weights that “auto” chooses"}; numbers stand with every digit.`
            : "Without energies the files carry no populations; numbers stand with every digit."
        }
      >
        {plural(result.kept.length, "distinct conformer")} as {energies ? "" : "a table, "}files that the next
        program opens, with the recipe that made them.
      </Finding>
      <OutdatedNote />
      <Files files={files} />
      <MethodsText text={text} />
      <Recipe recipe={sift.recipe} />
      <Sources />
    </section>
  );
}

const NAMES: Record<Format, string> = {
  csv: "Table, CSV",
  xyz: "Structures, extended XYZ",
  sdf: "Structures with bonds, SDF",
  json: "Everything, JSON",
};

function contents(format: Format, conformers: number, atoms: number): ReactNode {
  switch (format) {
    case "csv":
      return `${plural(conformers, "row")}: frame, label, relative energy, degeneracy, symmetry number, copies, found, population. No cell can run as a formula.`;
    case "xyz":
      return `${plural(conformers, "structure")} of ${plural(atoms, "atom")}; each comment line carries energy, unit, level, population, degeneracy, frame and the checksum of its source.`;
    case "sdf":
      return `${plural(conformers, "record")} ${atoms > 999 ? "V3000" : "V2000"} with bond orders and charges, the label as title; the same quantities as data fields, coordinates to the last digit.`;
    case "json":
      return "Recipe, units, constants, checksums of the source files, and the conformers, one a line.";
  }
}

function Files({ files }: { files: readonly ExportFacts[] | null }) {
  const { ensemble, sift, result, state } = useWorkbench();
  if (sift === null || result === null) return null;
  const query = sift.recipe.level === null ? "" : `?temperature=${state.temperatureK}`;
  const address = {
    csv: href("/files/sifts/:id/export.csv", { id: sift.id }),
    xyz: href("/files/sifts/:id/export.xyz", { id: sift.id }),
    sdf: href("/files/sifts/:id/export.sdf", { id: sift.id }),
    json: href("/files/sifts/:id/export.json", { id: sift.id }),
  };
  return (
    <section className="mt-7">
      <BlockHead title="Files of the distinct set" />
      <Table aria-label="Files of the distinct set">
        <thead>
          <tr>
            <Th>File</Th>
            <Th className="max-sm:hidden" align="right">
              Size
            </Th>
            <Th className="max-xl:hidden">SHA-256</Th>
            <Th>
              <span className="sr-only">Download</span>
            </Th>
          </tr>
        </thead>
        <tbody>
          {(["csv", "xyz", "sdf", "json"] as const).map((format) => {
            const facts = files?.find((file) => file.format === format);
            return (
              <Tr key={format}>
                <Td className="py-3 whitespace-normal!">
                  <span className="font-medium">{NAMES[format]}</span>
                  <span className="block max-w-read text-xs text-ink-3">
                    {contents(format, result.kept.length, ensemble.atoms)}
                  </span>
                </Td>
                <Td align="right" className="max-sm:hidden">
                  {facts ? formatBytes(facts.bytes) : "not measured"}
                </Td>
                <Td className="max-xl:hidden">
                  {facts ? (
                    <span
                      className="grid grid-cols-[9rem_auto] items-center justify-start"
                      title={facts.sha256}
                    >
                      {formatChecksum(facts.sha256)}
                      <CopyButton as="link" text={facts.sha256}>
                        Copy
                      </CopyButton>
                    </span>
                  ) : null}
                </Td>
                <Td align="right">
                  <a
                    className={`w-24 ${buttonClass({ size: "sm" })}`}
                    href={address[format] + query}
                    download
                  >
                    <Download aria-hidden="true" />
                    {format.toUpperCase()}
                  </a>
                </Td>
              </Tr>
            );
          })}
        </tbody>
      </Table>
      <p className="mt-2 text-xs text-ink-3">
        The same from a script: the calls stand in the{" "}
        <a className="text-link underline underline-offset-3" href={href("/api/v1/openapi.json")}>
          API description
        </a>
        ; this sift is <span className="figures">{sift.id}</span>.
      </p>
    </section>
  );
}

function MethodsText({ text }: { text: string }) {
  return (
    <section className="mt-9">
      <BlockHead title="For the methods section">
        <CopyButton text={text}>Copy</CopyButton>
      </BlockHead>
      <Note className="figures text-ink">{text}</Note>
      <p className="mt-2 text-xs text-ink-3">
        Written from the recipe and the counts, so it claims only what was done.{" "}
        <TextLink to={href("/methods")}>Formulas and sources</TextLink>
      </p>
    </section>
  );
}

function Recipe({ recipe }: { recipe: SiftRecipe }) {
  const { sift, result, level, temperatureK, populations } = useWorkbench();
  if (sift === null || result === null) return null;
  const facts = [
    { label: "Level", value: recipe.levelName ?? "none, file order" },
    level ? { label: "Unit in the files", value: level.unit } : null,
    {
      label: "Energy tolerance",
      value:
        recipe.energyTolerance === null ? "none" : withUnit(formatEnergy(recipe.energyTolerance), "kcal/mol"),
    },
    { label: "RMSD tolerance", value: withUnit(fixed(recipe.rmsdTolerance, 3), "Å") },
    {
      label: "Window",
      value: recipe.window === null ? "none" : withUnit(formatEnergy(recipe.window), "kcal/mol"),
    },
    { label: "Atoms compared", value: ATOM_SET_WORDS[recipe.atoms] },
    { label: "Symmetry", value: recipe.symmetry ? "all exchanges of equivalent atoms" : "off" },
    {
      label: "Mirror images",
      value: recipe.mirror === "merge" ? "merged, counted by degeneracy" : "kept apart",
    },
    { label: "Chirality", value: `${recipe.chirality}${recipe.chiralityOverridden ? ", by choice" : ""}` },
    populations
      ? {
          label: "Populations",
          value: `${withUnit(formatTemperature(temperatureK), "K")}, weighted by ${populations.weights.kind}`,
        }
      : null,
    {
      label: "Computed",
      value: `${formatDateTime(sift.createdAt)}, in ${formatSeconds(result.seconds)}, ${plural(result.pairsExamined, "pair")} compared`,
    },
    { label: "Constants", value: CONSTANTS_YEAR },
  ].filter((fact) => fact !== null);
  return (
    <section className="mt-9">
      <BlockHead title="Recipe" />
      <Facts facts={facts} ruled />
    </section>
  );
}

function Sources() {
  const { ensemble } = useWorkbench();
  return (
    <section className="mt-9">
      <BlockHead title={`Source ${ensemble.files.length === 1 ? "file" : "files"}`} />
      <ul className="border-t border-rule">
        {ensemble.files.map((file) => (
          <li
            key={file.position}
            className="figures flex flex-wrap items-baseline gap-x-6 gap-y-1 border-b border-rule py-2"
          >
            <span className="font-medium break-all">{file.name}</span>
            <span className="text-ink-2">
              {formatBytes(file.bytes)}, {formatCount(file.frames)} frames
            </span>
            <span className="text-xs break-all text-ink-3">SHA-256 {file.sha256}</span>
          </li>
        ))}
      </ul>
    </section>
  );
}
