import { exactNumber } from "../export/xyz-writer.ts";
import { conformerName } from "../workbench/conformers.ts";
import type { EditionContent } from "./content.ts";

/**
 * The distinct set as one file a conformer for the next program: plain XYZ with charge and multiplicity in the comment,
 * named so that a listing stands in the order of the set, and a list of them.
 *
 * @param xyz the edition's `distinct-set.xyz`
 * @throws RangeError where it does not hold as many structures as the edition has conformers
 * @example [...conformerFiles(content, xyz)][0]?.name // "c01-frame-11.xyz"
 */
export function* conformerFiles(
  content: Pick<EditionContent, "ensemble" | "kept" | "populations">,
  xyz: string,
): Generator<{ name: string; text: string }> {
  const { ensemble, kept, populations } = content;
  const lines = xyz.split("\n");
  const height = ensemble.atoms + 2;
  if (lines.length !== kept.length * height + 1) {
    throw new RangeError(
      `${lines.length} lines are no ${kept.length} structures of ${ensemble.atoms} atoms.`,
    );
  }
  const width = String(kept.length).length;
  const list: string[] = ["file\tconformer\tframe\trelative_kcal_mol\tpopulation\tcharge\tmultiplicity"];
  for (const [index, { frame, relativeEnergy }] of kept.entries()) {
    const name = `c${String(index + 1).padStart(width, "0")}-frame-${frame}.xyz`;
    const comment = [
      `charge=${ensemble.charge.value}`,
      `multiplicity=${ensemble.multiplicity.value}`,
      `conformer=${conformerName(index)}`,
      `frame=${frame}`,
      ...(relativeEnergy === null ? [] : [`relative_kcal_mol=${exactNumber(relativeEnergy)}`]),
    ];
    // Symbol and three coordinates; labels of the file would be columns that plain XYZ does not have.
    const atoms = lines.slice(index * height + 2, (index + 1) * height).map((line) => {
      const [symbol = "", ...axes] = line.split(/\s+/).slice(0, 4);
      return [symbol, ...axes.map(plainDecimal)].join(" ");
    });
    const population = populations?.values[index]?.population;
    const cells = [
      name,
      conformerName(index),
      String(frame),
      relativeEnergy === null ? "" : exactNumber(relativeEnergy),
      population === undefined ? "" : exactNumber(population),
      String(ensemble.charge.value),
      String(ensemble.multiplicity.value),
    ];
    list.push(cells.join("\t"));
    yield { name, text: `${ensemble.atoms}\n${comment.join(" ")}\n${atoms.join("\n")}\n` };
  }
  yield { name: "conformers.txt", text: `${list.join("\n")}\n` };
}

/** A coordinate as every program reads it: a whole number with its point, zero without a sign. */
function plainDecimal(text: string): string {
  return /^-?\d+$/.test(text) ? `${Number(text) === 0 ? "0" : text}.0` : text;
}
