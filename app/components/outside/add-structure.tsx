import { useEffect, useRef, useState } from "react";
import { useFetcher } from "react-router";
import { Button } from "~/components/ui/button";
import { Field, frameClass, TextField } from "~/components/ui/field";
import { Note } from "~/components/ui/note";
import { SelectField } from "~/components/ui/select-field";
import { showToast } from "~/components/ui/toast";
import type { LevelView } from "~/lib/views";

/** What the page's action answers. */
export interface OutsideAnswerToForm {
  /** Absent where the server refused: then `message` says why. */
  ok?: boolean;
  /** Id of what was added, or brought back. */
  id?: string;
  name?: string;
  /** Why the energy of what was added takes no part; null where it does, or where there is none. */
  unused?: string | null;
  message?: string;
  fields?: Record<string, string>;
}

/** A crystal or a bound pose, with its energy where it carries one at a level of the ensemble. */
export function AddStructure({
  levels,
  answered,
  onAdded,
}: {
  levels: readonly LevelView[];
  /** What the server answered where the form was sent without script. */
  answered: OutsideAnswerToForm | undefined;
  onAdded: (id: string) => void;
}) {
  const sending = useFetcher<OutsideAnswerToForm>();
  const [level, setLevel] = useState("auto");
  const form = useRef<HTMLFormElement>(null);
  const told = useRef<OutsideAnswerToForm | undefined>(undefined);
  const { data } = sending;
  useEffect(() => {
    if (!data || told.current === data) return;
    told.current = data;
    if (data.ok && data.id) {
      form.current?.reset();
      setLevel("auto");
      const added = `${data.name} lies beside the ensemble.`;
      showToast({ tone: "done", text: data.unused ? `${added} ${data.unused}` : added });
      onAdded(data.id);
    }
  }, [data, onAdded]);
  const busy = sending.state !== "idle";
  const answer = data ?? answered;
  const failed = answer && !answer.ok ? answer : null;
  const chosen = levels.find(({ id }) => id === level);
  // Told where the fault is; below the fields only what none of them shows.
  const { file, level: ofLevel, energy: ofEnergy } = failed?.fields ?? {};
  const energyFault = chosen ? ofEnergy : undefined;
  const levelFault = levels.length > 0 ? ofLevel : undefined;
  const atField = file ?? levelFault ?? energyFault;
  return (
    <sending.Form
      ref={form}
      method="post"
      encType="multipart/form-data"
      className="grid max-w-read gap-4"
      aria-busy={busy}
    >
      <Field id="outside-file" label="Crystal or bound pose, as XYZ or SDF" error={file}>
        <div className={frameClass(Boolean(file))}>
          <input
            id="outside-file"
            name="file"
            type="file"
            required
            accept=".xyz,.sdf,.sd,.mol,.gz,chemical/x-xyz,chemical/x-mdl-sdfile"
            className="min-w-0 flex-1 text-ink file:mr-3 file:rounded-sm file:border file:border-edge file:bg-sheet file:px-2 file:text-ink"
          />
        </div>
      </Field>
      {levels.length > 0 ? (
        <div className="grid gap-4 sm:grid-cols-2">
          <SelectField
            label="Its energy"
            name="level"
            value={level}
            error={levelFault}
            onChange={(event) => setLevel(event.currentTarget.value)}
            choices={[
              { value: "auto", label: "Where the ensemble’s own stand, if there" },
              { value: "none", label: "It carries none" },
              ...levels.map(({ id, name }) => ({ value: id, label: `At ${name}` })),
            ]}
          />
          {chosen ? (
            <TextField
              label="Typed; empty: read from the file"
              name="energy"
              unit={chosen.unit}
              inputMode="decimal"
              autoComplete="off"
              error={energyFault}
            />
          ) : null}
        </div>
      ) : null}
      {failed && atField === undefined ? (
        <Note tone="danger">
          <span role="alert">{failed.message}</span>
        </Note>
      ) : null}
      <p className="text-xs text-ink-3">
        Any order of atoms; hydrogens may be missing. It is mapped by its bonds. The energy counts only where
        it was computed at the same level, geometry and all.
      </p>
      <div>
        <Button kind="primary" type="submit" disabled={busy}>
          {busy ? "Reading" : "Lay it beside the ensemble"}
        </Button>
      </div>
    </sending.Form>
  );
}
