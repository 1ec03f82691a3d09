import type { MeasuredProperties } from "../averages/averaging.ts";
import type { MeasuredFigures } from "../averages/measured-csv.ts";
import { besideProperties } from "../averages/measured-properties.ts";
import type { AgreementFigures } from "../averages/measured-words.ts";
import type { PropertyValues } from "../averages/property-set.ts";
import { fixed, plural, withUnit } from "../format.ts";
import type { EditionContent } from "./content.ts";

export type EditionFigures = NonNullable<EditionContent["measuredProperties"]>;

/**
 * Measured values of properties beside the averages of an edition. Undefined where nothing was measured, so that editions
 * without it keep their bytes.
 *
 * @param properties in the order of `averages`
 * @param stated what people entered; null where nothing is kept
 */
export function figuresSection(
  properties: readonly Pick<PropertyValues, "quantity">[],
  averages: EditionContent["averages"],
  stated: MeasuredProperties | null,
): EditionFigures | undefined {
  if (stated === null) return undefined;
  const figures = (averages ?? [])
    .filter((_, place) => properties[place]?.quantity === null)
    .map(({ property, unit, rule, average, error }) => ({
      ...{ name: property, unit, rule, average },
      error: error?.sd ?? null,
    }));
  const { rows, units } = besideProperties(figures, new Map(stated.values));
  return {
    stated,
    rows: rows.flatMap(({ name, unit, average, error, measured, difference }) =>
      measured === null ? [] : [{ property: name, unit, average, error, measured, difference }],
    ),
    units: units.map(({ unit, agreement: { n, mad, rmsd, max, corrected }, farthest }) => ({
      unit,
      agreement: {
        ...{ n, mae: mad, rmse: rmsd, max, maxAt: farthest },
        corrected: corrected && {
          m: corrected.line.slope,
          b: corrected.line.intercept,
          mae: corrected.mad,
        },
      },
    })),
  };
}

type FrozenAgreement = Omit<EditionFigures["units"][number]["agreement"], "maxAt">;

/** An agreement of an edition as words and files take it. */
export function agreementFigures({ n, mae, rmse, max, corrected }: FrozenAgreement): AgreementFigures {
  return {
    ...{ n, mad: mae, rmsd: rmse, max },
    corrected: corrected && {
      line: { slope: corrected.m, intercept: corrected.b, n },
      mad: corrected.mae,
    },
  };
}

/** The same as the files take it. */
export function measuredFigures({ measuredProperties }: EditionContent): MeasuredFigures | undefined {
  return (
    measuredProperties && {
      rows: measuredProperties.rows.map(({ property, ...row }) => ({ name: property, ...row })),
      units: measuredProperties.units.map(({ unit, agreement }) => ({
        ...{ unit, farthest: agreement.maxAt },
        agreement: agreementFigures(agreement),
      })),
    }
  );
}

/** Sentence of the methods text; null where nothing was compared. */
export function figuresSentence(figures: EditionFigures | undefined): string | null {
  if (figures === undefined || figures.rows.length === 0) return null;
  const told = figures.units.map(
    ({ unit, agreement }) =>
      `${plural(agreement.n, "value")} in ${unit}, mean absolute error ${withUnit(fixed(agreement.mae, 2), unit)}`,
  );
  const of = plural(figures.rows.length, "property", "properties");
  return `Averages of ${of} were compared with measured values${told.length === 0 ? "" : ` (${told.join("; ")})`}.`;
}
