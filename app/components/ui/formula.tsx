import { formulaRuns } from "~/lib/chem/formula-runs";
import { formulaParts } from "~/lib/format";

/** A molecular formula with its counts set low. */
export function Formula({ children }: { children: string }) {
  return (
    <span className="whitespace-nowrap">
      {formulaParts(children).map((part, i) =>
        part.as === "sub" ? (
          <sub key={i}>{part.text}</sub>
        ) : part.as === "sup" ? (
          <sup key={i}>{part.text}</sup>
        ) : (
          <span key={i}>{part.text}</span>
        ),
      )}
    </span>
  );
}

/** A sentence whose formulas have their counts set low. */
export function WithFormulas({ children }: { children: string }) {
  return formulaRuns(children).map((run, k) =>
    run.formula ? <Formula key={k}>{run.text}</Formula> : <span key={k}>{run.text}</span>,
  );
}
