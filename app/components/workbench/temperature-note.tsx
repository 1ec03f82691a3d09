import { Note } from "~/components/ui/note";
import { temperatureWarning } from "~/lib/thermo/temperature-warning";
import type { LevelView } from "~/lib/views";

/** Free energies and enthalpies belong to one temperature: whatever weighs by them at another carries a warning. */
export function TemperatureNote({
  levels,
  temperaturesK,
}: {
  levels: readonly Pick<LevelView, "id" | "name" | "energyKind" | "temperature">[];
  temperaturesK: readonly number[];
}) {
  const warnings = levels.flatMap((level) => {
    const text = temperatureWarning(level, ...temperaturesK);
    return text === null ? [] : [{ id: level.id, text }];
  });
  if (warnings.length === 0) return null;
  return (
    <Note tone="remark" className="mt-4">
      <div role="status">
        {warnings.map(({ id, text }) => (
          <p key={id}>{text}</p>
        ))}
      </div>
    </Note>
  );
}
