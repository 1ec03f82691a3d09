import { assignmentPairs, compareMeasured, type PairAssignment } from "../averages/assignment.ts";
import type { MeasuredRecord } from "../averages/averaging.ts";
import { areShieldings, measuredState, type Nucleus, type SetAside, settle } from "../averages/measured.ts";
import type { MeasuredTable } from "../averages/measured-csv.ts";
import type { PropertyValues } from "../averages/property-set.ts";
import { atomName, symbolOf } from "../chem/elements.ts";
import { fixed, plural, withUnit } from "../format.ts";
import { makeGraph } from "../structure.ts";
import { joinWords } from "../workbench/findings.ts";
import type { EditionContent } from "./content.ts";
import { agreementFigures } from "./measured-figures.ts";

export type EditionMeasured = NonNullable<EditionContent["measured"]>[number];

/**
 * Measured values beside the averages of an edition, nucleus by nucleus, with both assignments of every pair that could
 * be swapped. Undefined where nothing was measured, so that editions without it keep their bytes.
 *
 * @param properties in the order of `averages`, equivalent atoms merged
 */
export function measuredSection(
  properties: readonly PropertyValues[],
  averages: EditionContent["averages"],
  ensemble: Pick<EditionContent["ensemble"], "elements" | "isotopes" | "bonds">,
  records: readonly MeasuredRecord[],
): EditionContent["measured"] {
  const { elements, isotopes, bonds } = ensemble;
  const graph = makeGraph(
    Uint8Array.from(elements),
    bonds,
    isotopes ? Uint16Array.from(isotopes) : undefined,
  );
  const made = records.map(({ quantity, ...stated }): EditionMeasured => {
    const own = firstOfGroups(properties, quantity);
    const groups = own.map(({ atoms }) => atoms);
    // Values measured for atoms that are no signal of this edition take no part; what was stated stays as it was.
    const state = settle(
      measuredState({ quantity, ...stated }),
      groups.map((atoms) => atoms.map((atom) => atom + 1)),
    );
    const unit = own[0]?.unit ?? null;
    const first = (place: number) => (groups[place]?.[0] ?? 0) + 1;
    const shieldings = areShieldings(state, unit);
    const { nuclei, pairs } = compareMeasured(
      own.map(({ atoms, place }) => ({
        atom: (atoms[0] ?? 0) + 1,
        z: elements[atoms[0] ?? 0] ?? 0,
        average: averages?.[place]?.average ?? null,
        error: averages?.[place]?.error?.sd ?? null,
        measured: state.values.get((atoms[0] ?? 0) + 1) ?? null,
      })),
      {
        shieldings,
        scaling: state.scaling,
        pairs: assignmentPairs(graph, groups).map(([a, b]) => [first(a), first(b)]),
        swapped: state.swapped,
      },
    );
    const atomsOf = new Map(groups.map((atoms) => [(atoms[0] ?? 0) + 1, atoms.map((atom) => atom + 1)]));
    return {
      ...{ quantity, unit, shieldings, stated },
      nuclei: nuclei.map((nucleus) => nucleusOf(nucleus, atomsOf)),
      pairs: pairs.map((pair) => pairOf(pair)),
    };
  });
  return made.length === 0 ? undefined : made;
}

/** A row a group of equivalent atoms, with its place among the properties. */
function firstOfGroups(properties: readonly PropertyValues[], quantity: string) {
  const seen = new Set<number>();
  return properties
    .flatMap(({ quantity: of, atoms, unit }, place) => {
      const first = atoms?.[0];
      if (of !== quantity || atoms === null || first === undefined || seen.has(first)) return [];
      seen.add(first);
      return [{ atoms, unit, place }];
    })
    .sort((a, b) => (a.atoms[0] ?? 0) - (b.atoms[0] ?? 0));
}

function nucleusOf(
  { z, groups, line, agreement, farthest }: Nucleus,
  atomsOf: ReadonlyMap<number, number[]>,
): EditionMeasured["nuclei"][number] {
  return {
    z,
    line,
    agreement: agreement && {
      n: agreement.n,
      mae: agreement.mad,
      rmse: agreement.rmsd,
      max: agreement.max,
      maxAt: farthest ?? 0,
      // A line that was fitted to these very values has slope 1 against them: there is nothing to take out.
      corrected:
        agreement.corrected === null || line?.from === "fitted"
          ? null
          : {
              m: agreement.corrected.line.slope,
              b: agreement.corrected.line.intercept,
              mae: agreement.corrected.mad,
            },
    },
    groups: groups.map(({ atom, average, computed, computedError, measured, difference }) => ({
      atoms: atomsOf.get(atom) ?? [atom],
      ...{ average, computed, error: computedError, measured, difference },
    })),
  };
}

function pairOf({ atoms, z, swapped, entered, exchanged }: PairAssignment): EditionMeasured["pairs"][number] {
  const errorsOf = ({ pairMad, nucleus }: PairAssignment["entered"]) => ({
    mae: pairMad,
    nucleusMae: nucleus.mad,
  });
  return {
    ...{ atoms, z },
    chosen: swapped ? "swapped" : "entered",
    entered: errorsOf(entered),
    swapped: errorsOf(exchanged),
  };
}

/** Names of the atoms (from 1) of a group. */
export const atomNames = (elements: readonly number[], atoms: readonly number[]) =>
  atoms.map((atom) => atomName(elements, atom - 1)).join(", ");

/** Values that were stated for atoms that are no signal of the edition. */
export function setAsideIn({ quantity, stated, nuclei }: EditionMeasured): readonly SetAside[] {
  const groups = nuclei.flatMap((nucleus) => nucleus.groups.map(({ atoms }) => atoms));
  return settle(measuredState({ quantity, ...stated }), groups).aside ?? [];
}

/** The same as the files take it. */
export function measuredTables({ measured, ensemble }: EditionContent): MeasuredTable[] {
  return (measured ?? []).map(({ quantity, unit, nuclei, pairs }): MeasuredTable => {
    const groups = new Map(
      nuclei.flatMap((one) => one.groups.map(({ atoms }) => [atoms[0] ?? 0, atoms] as const)),
    );
    return {
      quantity,
      unit,
      nameOf: (atom) => atomNames(ensemble.elements, groups.get(atom) ?? [atom]),
      nuclei: nuclei.map(({ z, line, agreement, groups: own }) => ({
        z,
        line,
        farthest: agreement?.maxAt ?? null,
        agreement: agreement && { ...agreementFigures(agreement), msd: 0, maxPlace: 0 },
        groups: own.map(({ atoms, error, ...rest }) => ({
          ...rest,
          ...{ atom: atoms[0] ?? 0, z, error, computedError: error },
        })),
      })),
      pairs: pairs.map(({ atoms: [a = 0, b = 0], z, chosen, entered, swapped }) => {
        const errorsOf = ({ mae }: { mae: number }) => ({ pairMad: mae });
        return {
          atoms: [a, b],
          z,
          swapped: chosen === "swapped",
          entered: errorsOf(entered),
          exchanged: errorsOf(swapped),
        };
      }),
    };
  });
}

/** Sentences of the methods text on groups taken apart and on measured values. */
export function measuredSentences({
  splits,
  measured,
  ensemble,
}: Pick<EditionContent, "splits" | "measured" | "ensemble">): string[] {
  const names = (atoms: readonly number[]) => atomNames(ensemble.elements, atoms);
  const apart = (splits ?? []).map((parts) => joinWords(parts.map(names)));
  return [
    ...(apart.length === 0
      ? []
      : [
          `Atoms that exchanges make equivalent were averaged as separate signals where a slow rotor was assumed by hand: ${apart.join("; ")}.`,
        ]),
    ...(measured ?? []).flatMap(({ quantity, unit, nuclei, pairs }) => {
      const told = nuclei.flatMap(({ z, agreement }) =>
        agreement === null
          ? []
          : [
              `${symbolOf(z)}: ${plural(agreement.n, "value")}, mean absolute error ${withUnit(fixed(agreement.mae, 2), unit ?? "")}`,
            ],
      );
      const swapped = pairs.filter(({ chosen }) => chosen === "swapped");
      return told.length === 0
        ? []
        : [
            `Averages of ${quantity} were compared with measured values, each nucleus by itself (${told.join("; ")})` +
              (pairs.length === 0
                ? "."
                : `; of ${plural(pairs.length, "pair")} that could be assigned either way ${
                    swapped.length === 0
                      ? "all are assigned as entered."
                      : `${joinWords(swapped.map(({ atoms }) => atoms.map((atom) => names([atom])).join("/")))} ${swapped.length === 1 ? "is" : "are"} swapped.`
                  }`),
          ];
    }),
  ];
}
