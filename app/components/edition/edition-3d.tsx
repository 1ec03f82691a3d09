import { useCallback, useMemo, useState } from "react";
import { Button } from "~/components/ui/button";
import { Viewer, type ViewerProps } from "~/components/viewer/viewer";
import type { EditionView } from "~/lib/edition/views";
import { plural } from "~/lib/format";
import { formatMeasure, measureKind, measureLabel, measureValue } from "~/lib/measure/measure";
import type { HydrogenMode, ViewMode } from "~/lib/url-state";

/** The 3D view of an edition, fetched when somebody asks for it; without script or WebGL the pictures above stand. */
export function Edition3D({ edition, address }: { edition: EditionView; address: string }) {
  const [positions, setPositions] = useState<Float64Array | null>(null);
  const [state, setState] = useState<"closed" | "coming" | "failed">("closed");
  const open = useCallback(async () => {
    setState("coming");
    try {
      const response = await fetch(address);
      if (!response.ok) throw new Error(String(response.status));
      setPositions(new Float64Array(await response.arrayBuffer()));
    } catch {
      setState("failed");
    }
  }, [address]);
  if (positions !== null) return <OpenView edition={edition} positions={positions} />;
  return (
    <p className="mt-4 flex flex-wrap items-center gap-3 print:hidden">
      <Button size="sm" disabled={state === "coming"} onClick={() => void open()}>
        {state === "coming" ? "Fetching the structures" : "Open in 3D"}
      </Button>
      {state === "failed" ? (
        <span role="alert" className="text-danger">
          The structures could not be fetched. The link may have ended; try again.
        </span>
      ) : null}
    </p>
  );
}

function OpenView({ edition, positions }: { edition: EditionView; positions: Float64Array }) {
  const { ensemble } = edition;
  const [mode, setMode] = useState<ViewMode>("overlay");
  const [hydrogens, setHydrogens] = useState<HydrogenMode>("polar");
  const [picked, setPicked] = useState<number[]>([]);
  const [chosen, setChosen] = useState(0);
  const length = 3 * ensemble.atoms;
  const conformers = useMemo(() => {
    return edition.viewable.flatMap((row, place) => {
      const found = edition.rows[row];
      const at = positions.subarray(place * length, (place + 1) * length);
      return found && at.length === length ? [{ ...found, positions: at, place }] : [];
    });
  }, [edition, positions, length]);
  const shown = useMemo<ViewerProps["conformers"]>(
    () =>
      conformers
        .filter(({ place }) => mode !== "one" || place === chosen)
        .map(({ frame, name, population, positions: at, place }) => ({
          frame,
          name,
          population,
          positions: at,
          selected: place === chosen,
        })),
    [conformers, chosen, mode],
  );
  const kind = measureKind(picked);
  const at = conformers[chosen]?.positions;
  return (
    <section className="mt-6 print:hidden" aria-label="3D view">
      <div className="grid gap-4 md:grid-cols-[minmax(0,1fr)_14rem]">
        <Viewer
          elements={ensemble.elements}
          bonds={ensemble.bonds}
          conformers={shown}
          anchor={conformers[0]?.positions ?? null}
          alignOn={null}
          picked={picked}
          onPick={setPicked}
          hydrogens={hydrogens}
          onHydrogens={setHydrogens}
          mode={mode}
          onMode={setMode}
          caption={{ strong: ensemble.name, rest: plural(conformers.length, "conformer") }}
          measures={
            kind !== null && at
              ? [
                  {
                    label: measureLabel(ensemble.elements, picked),
                    text: formatMeasure(kind, measureValue(at, picked)),
                  },
                ]
              : []
          }
        />
        <ul className="max-h-96 overflow-y-auto border-t border-rule" aria-label="Conformers in the view">
          {conformers.map(({ name, frame, place }) => (
            <li key={frame} className="border-b border-rule">
              <button
                type="button"
                aria-pressed={place === chosen}
                onClick={() => setChosen(place)}
                className="figures flex w-full justify-between px-2 py-2 text-left aria-pressed:bg-mark-wash aria-pressed:inset-shadow-[3px_0_0_var(--color-mark)]"
              >
                <span className="font-medium">{name}</span>
                <span className="text-ink-3">frame {frame}</span>
              </button>
            </li>
          ))}
        </ul>
      </div>
    </section>
  );
}
