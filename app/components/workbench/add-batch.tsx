import { useId, useState } from "react";
import { href, useRevalidator } from "react-router";
import { DropOverlay, Dropzone, usePageDrop } from "~/components/ui/dropzone";
import { TextField } from "~/components/ui/field";
import { BlockHead } from "~/components/ui/finding";
import { SelectField } from "~/components/ui/select-field";
import { UploadList } from "~/components/ui/upload-row";
import { useUploads } from "~/components/ui/use-uploads";
import { ENERGY_UNITS } from "~/lib/units";
import type { NumberView } from "~/lib/views";
import { useWorkbench } from "./workbench-context";

const UNITS = [
  { value: "", label: "as the files and the ensemble say" },
  // Those that a request may state.
  ...ENERGY_UNITS.slice(0, 4).map((unit) => ({ value: unit, label: unit })),
];

/** A second search or a further batch of the same molecule, from the whole page or from the dialog. */
export function AddBatch({ numbers }: { numbers: readonly NumberView[] }) {
  const { ensemble } = useWorkbench();
  const list = useId();
  const revalidator = useRevalidator();
  const uploads = useUploads(() => void revalidator.revalidate());
  const [fields, setFields] = useState({ name: "", level: "", energyUnit: "", energyFrom: "" });
  const send = (files: File[]) =>
    uploads.add({
      action: href("/files/ensembles/:id/files", { id: ensemble.id }),
      fields: Object.fromEntries(Object.entries(fields).filter(([, value]) => value.trim() !== "")),
      files,
    });
  const over = usePageDrop(send);
  const set = (key: keyof typeof fields) => (value: string) => setFields({ ...fields, [key]: value });
  const level = ensemble.levels[0]?.name;
  return (
    <section className="mt-9 noscript:hidden print:hidden">
      <BlockHead title="Add a search or batch" />
      <p className="mb-3 max-w-read text-ink-2">
        Frames of the same molecule are numbered on from {ensemble.frames + 1}.{" "}
        {level === undefined
          ? "The ensemble has no energies; to bring some, name their level below."
          : `Number, unit and level of their energies are those of “${level}” where the files are alike; else say them here.`}{" "}
        Which search found a conformer stays known.
      </p>
      <Dropzone
        onFiles={send}
        hint="XYZ or SDF, plain, gzip or in a zip archive; several files make one batch"
      />
      <details className="mt-3">
        <summary className="cursor-pointer text-link">Name, level and unit of the batch</summary>
        <div className="mt-3 grid max-w-read gap-4 sm:grid-cols-2">
          <TextField
            label="Name of the search"
            value={fields.name}
            maxLength={200}
            onChange={(event) => set("name")(event.currentTarget.value)}
          />
          <TextField
            label="Level of theory"
            value={fields.level}
            maxLength={120}
            placeholder={level}
            onChange={(event) => set("level")(event.currentTarget.value)}
          />
          <SelectField
            label="Unit of the energies"
            value={fields.energyUnit}
            choices={UNITS}
            onChange={(event) => set("energyUnit")(event.currentTarget.value)}
          />
          <TextField
            label="Which number is the energy"
            value={fields.energyFrom}
            maxLength={200}
            list={list}
            help="Empty: as in the frames that are here. The list has their numbers; for another write key: and its name before “=” or “:”, field: and the name of the data field, number: and its place in the comment line, or none."
            onChange={(event) => set("energyFrom")(event.currentTarget.value)}
          />
          <datalist id={list}>
            {numbers.map(({ from, name, example }) => (
              <option key={from} value={from} label={example === null ? name : `${name} (${example})`} />
            ))}
            <option value="none" label="no energies" />
          </datalist>
        </div>
      </details>
      <div className="mt-4 empty:hidden">
        <UploadList
          uploads={uploads.list}
          onCancel={uploads.cancel}
          onAgain={uploads.again}
          onDismiss={uploads.dismiss}
        />
      </div>
      <DropOverlay over={over} where={`They join ${ensemble.name} as a further batch.`} />
    </section>
  );
}
