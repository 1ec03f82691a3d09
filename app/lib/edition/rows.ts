import { type ConformerRow, conformerName } from "../workbench/conformers.ts";
import type { EditionContent } from "./content.ts";

/**
 * The conformers of an edition as tables, charts and sentences take them, in the order of the set.
 *
 * @example editionRows(content)[0]?.name // "c1"
 */
export function editionRows(content: Pick<EditionContent, "kept" | "populations">): ConformerRow[] {
  return content.kept.map((kept, index) => ({
    index,
    name: conformerName(index),
    frame: kept.frame,
    relativeEnergy: kept.relativeEnergy,
    population: content.populations?.values[index]?.population ?? null,
    weight: content.populations?.values[index]?.weight ?? null,
    degeneracy: kept.degeneracy,
    symmetryNumber: kept.symmetryNumber,
    copies: kept.copies,
    mirrorRmsd: kept.mirrorRmsd,
    found: kept.found,
    outside: false,
    upperBound: kept.upperBound === true,
  }));
}
