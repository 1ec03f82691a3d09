import { symbolOf } from "../chem/elements.ts";
import { numberCell, textCell } from "../export/csv.ts";
import type { PairAssignment } from "./assignment.ts";
import type { Nucleus } from "./measured.ts";

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
 * `measured.csv`: a group of equivalent atoms a row, every digit, after RFC 4180. `assignment` says of a pair that could
 * be assigned either way whether its measured values were exchanged.
 *
 * @example besideCsv([table]).split("\r\n")[0] // "quantity,unit,nucleus,atoms,average,computed,..."
 */
export function besideCsv(tables: readonly MeasuredTable[], facts: AverageFacts | null = null): string {
  const { head, cells } = factCells(facts);
  return file(
    `quantity,unit,nucleus,atoms,average,computed,uncertainty,measured,difference,assignment,slope,intercept${head}`,
    tables.flatMap(({ quantity, unit, nuclei, pairs, nameOf }) => {
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
    }),
  );
}

/**
 * `agreement.csv`: errors a nucleus a row, then both assignments of each pair that could be swapped. m, b: the line of
 * the computed values against the measured ones, from five values on.
 *
 * @example agreementCsv([table]).split("\r\n")[0] // "quantity,unit,nucleus,of,assignment,n,mae,rmse,max,..."
 */
export function agreementCsv(tables: readonly MeasuredTable[], facts: AverageFacts | null = null): string {
  const { head, cells } = factCells(facts);
  return file(
    `quantity,unit,nucleus,of,assignment,n,mae,rmse,max,maxAt,m,b,correctedMae${head}`,
    tables.flatMap(({ quantity, unit, nuclei, pairs, nameOf }) => {
      const start = (z: number) => [textCell(quantity), textCell(unit ?? ""), symbolOf(z)];
      const all = nuclei.flatMap(({ z, agreement, farthest, line }) =>
        agreement === null
          ? []
          : [
              [
                ...start(z),
                "all",
                "as chosen",
                numberCell(agreement.n),
                numberCell(agreement.mad),
                numberCell(agreement.rmsd),
                numberCell(agreement.max),
                textCell(farthest === null ? "" : nameOf(farthest)),
                // A line fitted to these very values has slope 1 against them.
                ...(line?.from === "fitted" || agreement.corrected === null
                  ? ["", "", ""]
                  : [
                      numberCell(agreement.corrected.line.slope),
                      numberCell(agreement.corrected.line.intercept),
                      numberCell(agreement.corrected.mad),
                    ]),
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
    }),
  );
}
