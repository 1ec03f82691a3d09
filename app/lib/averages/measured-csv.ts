import { symbolOf } from "../chem/elements.ts";
import { numberCell, textCell } from "../export/csv.ts";
import type { PairAssignment } from "./assignment.ts";
import type { Nucleus } from "./measured.ts";
import type { FigureBeside } from "./measured-properties.ts";
import type { Agreement } from "./shielding-fit.ts";

/** One quantity beside its measured values, with names for its groups. */
export interface MeasuredTable {
  quantity: string;
  unit: string | null;
  nuclei: readonly Nucleus[];
  pairs: readonly (Pick<PairAssignment, "atoms" | "z" | "swapped"> & {
    entered: Pick<PairAssignment["entered"], "pairMad">;
    exchanged: Pick<PairAssignment["exchanged"], "pairMad">;
  })[];
  /** Of the group that begins with that atom, from 1. */
  nameOf: (atom: number) => string;
}

/** Properties of the whole molecule beside their measured values, as the files take them. */
export interface MeasuredFigures {
  rows: readonly Pick<FigureBeside, "name" | "unit" | "average" | "error" | "measured" | "difference">[];
  units: readonly { unit: string; agreement: AgreementCells; farthest: string }[];
}

type AgreementCells = Pick<Agreement, "n" | "mad" | "rmsd" | "max" | "corrected">;

const NO_FIGURES: MeasuredFigures = { rows: [], units: [] };

/** What averages belong to: a file that leaves the page names it in every row. */
export interface AverageFacts {
  temperatureK: number;
  level: string;
  weights: string;
  /** kcal/mol, draws and seed of the uncertainty; null without one. */
  sigma: number | null;
  draws: number | null;
  seed: number | null;
}

/** Head and cells of the facts; none for editions, whose content names them once. */
function factCells(facts: AverageFacts | null): { head: string; cells: string[] } {
  if (facts === null) return { head: "", cells: [] };
  return {
    head: ",temperature [K],level,weights,sigma [kcal/mol],draws,seed",
    cells: [
      numberCell(facts.temperatureK),
      textCell(facts.level),
      textCell(facts.weights),
      numberCell(facts.sigma),
      numberCell(facts.draws),
      numberCell(facts.seed),
    ],
  };
}

const LINE_END = "\r\n";
const file = (head: string, lines: readonly (readonly string[])[]) =>
  [head, ...lines.map((cells) => cells.join(","))].join(LINE_END) + LINE_END;

/**
 * `measured.csv`: a group of equivalent atoms a row, then a property of the whole molecule a row (without nucleus and
 * atoms), every digit, after RFC 4180. `assignment` says of a pair that could be assigned either way whether its measured
 * values were exchanged.
 *
 * @example besideCsv([table]).split("\r\n")[0] // "quantity,unit,nucleus,atoms,average,computed,..."
 */
export function besideCsv(
  tables: readonly MeasuredTable[],
  facts: AverageFacts | null = null,
  figures: MeasuredFigures = NO_FIGURES,
): string {
  const { head, cells } = factCells(facts);
  const whole = figures.rows.map(({ name, unit, average, error, measured, difference }) => [
    ...[textCell(name), textCell(unit ?? ""), "", ""],
    ...[average, average, error, measured, difference].map(numberCell),
    ...["", "", ""],
    ...cells,
  ]);
  return file(
    `quantity,unit,nucleus,atoms,average,computed,uncertainty,measured,difference,assignment,slope,intercept${head}`,
    tables
      .flatMap(({ quantity, unit, nuclei, pairs, nameOf }) => {
        const swapped = new Map(
          pairs.flatMap((pair) => pair.atoms.map((atom) => [atom, pair.swapped] as const)),
        );
        return nuclei.flatMap(({ z, groups, line }) =>
          groups.map((group) => {
            const chosen = swapped.get(group.atom);
            return [
              textCell(quantity),
              textCell(unit ?? ""),
              symbolOf(z),
              textCell(nameOf(group.atom)),
              numberCell(group.average),
              numberCell(group.computed),
              numberCell(group.computedError),
              numberCell(group.measured),
              numberCell(group.difference),
              chosen === undefined ? "" : chosen ? "swapped" : "as entered",
              numberCell(line?.slope ?? null),
              numberCell(line?.intercept ?? null),
              ...cells,
            ];
          }),
        );
      })
      .concat(whole),
  );
}

/** n, mae, rmse, max, maxAt, m, b, correctedMae. */
function agreementCells(
  { n, mad, rmsd, max, corrected }: AgreementCells,
  farthest: string,
  /** A line fitted to these very values has slope 1 against them. */
  fitted: boolean,
): string[] {
  const line = fitted ? null : corrected;
  return [
    ...[n, mad, rmsd, max].map(numberCell),
    textCell(farthest),
    ...[line?.line.slope, line?.line.intercept, line?.mad].map((value) => numberCell(value ?? null)),
  ];
}

/**
 * `agreement.csv`: errors a nucleus a row, then both assignments of each pair that could be swapped, then properties of
 * the whole molecule a unit a row. m, b: the line of the computed values against the measured ones, from five values on.
 *
 * @example agreementCsv([table]).split("\r\n")[0] // "quantity,unit,nucleus,of,assignment,n,mae,rmse,max,..."
 */
export function agreementCsv(
  tables: readonly MeasuredTable[],
  facts: AverageFacts | null = null,
  figures: MeasuredFigures = NO_FIGURES,
): string {
  const { head, cells } = factCells(facts);
  return file(
    `quantity,unit,nucleus,of,assignment,n,mae,rmse,max,maxAt,m,b,correctedMae${head}`,
    tables
      .flatMap(({ quantity, unit, nuclei, pairs, nameOf }) => {
        const start = (z: number) => [textCell(quantity), textCell(unit ?? ""), symbolOf(z)];
        const all = nuclei.flatMap(({ z, agreement, farthest, line }) =>
          agreement === null
            ? []
            : [
                [
                  ...start(z),
                  "all",
                  "as chosen",
                  ...agreementCells(
                    agreement,
                    farthest === null ? "" : nameOf(farthest),
                    line?.from === "fitted",
                  ),
                ],
              ],
        );
        const either = pairs.flatMap(({ atoms: [a, b], z, swapped, entered, exchanged }) =>
          [
            { fit: entered, how: "as entered", chosen: !swapped },
            { fit: exchanged, how: "swapped", chosen: swapped },
          ].map(({ fit, how, chosen }) => [
            ...start(z),
            textCell(`${nameOf(a)} and ${nameOf(b)}`),
            `${how}${chosen ? " (chosen)" : ""}`,
            "2",
            numberCell(fit.pairMad),
            ...["", "", "", "", "", ""],
          ]),
        );
        return [...all, ...either].map((row) => [...row, ...cells]);
      })
      .concat(
        figures.units.map(({ unit, agreement, farthest }) => [
          ...["properties", textCell(unit), "", "all", ""],
          ...agreementCells(agreement, farthest, false),
          ...cells,
        ]),
      ),
  );
}
