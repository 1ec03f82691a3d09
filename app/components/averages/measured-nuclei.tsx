import { NumberField } from "~/components/ui/number-field";
import { TextButton } from "~/components/ui/text-link";
import type { MeasuredState, Nucleus } from "~/lib/averages/measured";
import { agreementWords, scalingWords } from "~/lib/averages/measured-words";
import { symbolOf } from "~/lib/chem/elements";
import { fixed, MINUS } from "~/lib/format";

/** A nucleus a row: the line of its shieldings, and how well it meets the measured values. */
export function MeasuredNuclei({
  nuclei,
  shieldings,
  unit,
  nameOf,
  state,
  change,
}: {
  nuclei: readonly Nucleus[];
  shieldings: boolean;
  unit: string | null;
  nameOf: (atom: number | null) => string;
  state: MeasuredState;
  change: (part: Partial<MeasuredState>) => void;
}) {
  const type = (z: number, line: { slope: number; intercept: number } | null) => {
    const scaling = new Map(state.scaling);
    if (line === null) scaling.delete(z);
    else scaling.set(z, line);
    change({ scaling });
  };
  return (
    <div className="grid gap-5">
      {nuclei.map(({ z, line, agreement, farthest }) => (
        <section key={z} aria-label={`Nucleus ${symbolOf(z)}`} className="border-t border-rule pt-3">
          <p className="figures max-w-read">
            <b>{symbolOf(z)}</b> {agreementWords(agreement, unit, nameOf(farthest), line?.from === "fitted")}
          </p>
          {shieldings ? (
            <>
              <p className="figures mt-1 max-w-read text-ink-2">{scalingWords(line)}</p>
              <div className="mt-3 flex flex-wrap items-end gap-3 print:hidden">
                <NumberField
                  label="Slope"
                  className="w-32"
                  value={line?.slope ?? null}
                  optional
                  placeholder="−1.05"
                  write={(value) => fixed(value, 4)}
                  wrong="A slope near −1, not 0."
                  onCommit={(slope) =>
                    slope === null || slope === 0
                      ? type(z, null)
                      : type(z, { slope, intercept: line?.intercept ?? 0 })
                  }
                />
                <NumberField
                  label="Intercept"
                  className="w-40"
                  unit="ppm"
                  value={line?.intercept ?? null}
                  optional
                  placeholder="186.20"
                  write={(value) => fixed(value, 2)}
                  wrong="A number such as 186.20."
                  onCommit={(intercept) =>
                    intercept === null ? type(z, null) : type(z, { slope: line?.slope ?? -1, intercept })
                  }
                />
                {line?.from === "typed" ? (
                  <TextButton className="mb-2" onClick={() => type(z, null)}>
                    Fit to the measured values
                  </TextButton>
                ) : null}
              </div>
            </>
          ) : null}
        </section>
      ))}
      {shieldings ? (
        <p className="max-w-read text-xs text-ink-3">
          Shift = (intercept {MINUS} shielding)/({MINUS}slope). Slope and intercept belong to one level,
          solvent and nucleus; with slope {MINUS}1 the intercept is the shielding of the reference compound. A
          line fitted to the values that it is then compared with makes deviations look smaller than they are.
        </p>
      ) : null}
    </div>
  );
}
