import { useMemo, useState } from "react";
import { BlockHead } from "~/components/ui/finding";
import { LevelName } from "~/components/ui/level-marker";
import { Segments } from "~/components/ui/segments";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { ABSENT, fixed, formatWindowToCarry } from "~/lib/format";
import { compareLevels } from "~/lib/levels/compare";
import { type Member, pairLevels } from "~/lib/levels/level-energies";
import { nextWindow, windowCurve } from "~/lib/levels/window";
import { LONG_NAMES } from "./compared-table";
import type { LevelData } from "./use-comparison";

const MEASURES = {
  rmsd: { label: "RMSD", unit: "kcal/mol, mean offset", digits: 2, factor: 1 },
  kendall: { label: "Kendall", unit: "τb", digits: 2, factor: 1 },
  overlap: { label: "Overlap", unit: "% of the population", digits: 0, factor: 100 },
  window: {
    label: "Window",
    unit: "kcal/mol at the row's level for 95 % of the column's population",
    digits: 2,
    factor: 1,
  },
} as const;
type Measure = keyof typeof MEASURES;

/** Every level against every other: a click opens that comparison. */
export function LevelMatrix({
  levels,
  members,
}: {
  levels: readonly LevelData[];
  members: readonly Member[];
}) {
  const { temperatureK, state, change } = useWorkbench();
  const [measure, setMeasure] = useState<Measure>("rmsd");
  const cells = useMemo(
    () =>
      levels.map((level) =>
        levels.map((reference) =>
          level === reference ? null : cellOf(level, reference, members, temperatureK),
        ),
      ),
    [levels, members, temperatureK],
  );
  const { unit, digits, factor } = MEASURES[measure];
  return (
    <section className="mt-9" aria-labelledby="level-matrix">
      <BlockHead id="level-matrix" title="Every level against every other">
        <Segments
          label="Measure"
          hideLabel
          size="sm"
          value={measure}
          onChange={setMeasure}
          options={(Object.keys(MEASURES) as Measure[]).map((value) => ({
            value,
            label: MEASURES[value].label,
          }))}
        />
      </BlockHead>
      <div className="scroll-sign overflow-x-auto">
        <Table aria-labelledby="level-matrix">
          <thead>
            <tr>
              <Th unit={unit}>Level, reference across</Th>
              {levels.map((reference) => (
                <Th key={reference.id} align="right" className={LONG_NAMES}>
                  <LevelName name={reference.name} ordinal={reference.ordinal} />
                </Th>
              ))}
            </tr>
          </thead>
          <tbody>
            {levels.map((level, r) => (
              <Tr key={level.id}>
                <Td wrap className={LONG_NAMES}>
                  <LevelName name={level.name} ordinal={level.ordinal} />
                </Td>
                {levels.map((reference, c) => {
                  const cell = cells[r]?.[c] ?? null;
                  const value = cell?.[measure] ?? null;
                  const text =
                    measure === "window"
                      ? formatWindowToCarry(value, cell?.next)
                      : fixed(value === null ? null : factor * value, digits);
                  return (
                    <Td key={reference.id} align="right">
                      {cell === null ? (
                        ABSENT
                      ) : (
                        <TextButton
                          printed
                          aria-label={`${MEASURES[measure].label} of ${level.name} against ${reference.name}: ${text}. Compare them`}
                          onClick={() =>
                            change({
                              compare: {
                                ...state.compare,
                                level: level.id,
                                reference: reference.id,
                                zeroFrame: null,
                              },
                            })
                          }
                        >
                          {text}
                        </TextButton>
                      )}
                    </Td>
                  );
                })}
              </Tr>
            ))}
          </tbody>
        </Table>
      </div>
    </section>
  );
}

function cellOf(
  level: LevelData,
  reference: LevelData,
  members: readonly Member[],
  temperatureK: number,
): (Record<Measure, number | null> & { next: number }) | null {
  const paired = pairLevels(members, level.energies, reference.energies);
  if (paired.members.length === 0) return null;
  const found = compareLevels({ ...paired, temperatureK });
  const window = found.window[1]?.kcal ?? null;
  return {
    rmsd: found.rmsd,
    kendall: found.kendall,
    overlap: found.populationOverlap,
    window,
    next: nextWindow(windowCurve(paired.level, found.referencePopulations), window ?? 0),
  };
}
