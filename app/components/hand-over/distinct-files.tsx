import { Download } from "lucide-react";
import type { ReactNode } from "react";
import { href } from "react-router";
import { buttonClass } from "~/components/ui/button";
import { CopyButton } from "~/components/ui/copy-button";
import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { formatBytes, formatChecksum, plural } from "~/lib/format";
import type { ExportFacts } from "~/services/sifts/describe-exports.server";

type Format = "csv" | "xyz" | "sdf" | "json";

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

/** The distinct set as it is now, as files for the spreadsheet, the next program and a script. */
export function DistinctFiles({ files }: { files: readonly ExportFacts[] | null }) {
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
    <section className="mt-9">
      <BlockHead title="The distinct set as it is now" />
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
