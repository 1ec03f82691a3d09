import { Button } from "~/components/ui/button";
import { Checkbox } from "~/components/ui/checkbox";
import { DropOverlay, Dropzone, usePageDrop } from "~/components/ui/dropzone";
import { TextField } from "~/components/ui/field";
import { BlockHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { SelectField } from "~/components/ui/select-field";
import { StatePanel } from "~/components/ui/state-panel";
import type { ColumnsPreview } from "~/lib/api/schemas";
import { ENERGY_KIND_WORDS } from "~/lib/columns-view";
import { plural } from "~/lib/format";
import { AnsweredPoints, OpenPoints } from "./open-points";
import { FirstRows, TakenAs } from "./preview-tables";
import { type AddedFile, useAddedFile } from "./use-added-file";

const SHOWN_MESSAGES = 12;
/** A header names an atom that is not there, or another element. */
const NO_SUCH_ATOM = "C15";

/** A level or a property table, from the file to the columns that are kept: nothing before it is looked at. */
export function AddColumns({ ensembleId }: { ensembleId: string }) {
  const added = useAddedFile(ensembleId);
  const { file, preview, refused, busy } = added;
  const over = usePageDrop(added.choose, busy === "saving");
  return (
    <section className="mt-9" aria-labelledby="add-columns">
      <BlockHead id="add-columns" title="Add a level or a property table">
        {file ? (
          <Button size="sm" onClick={added.clear} disabled={busy === "saving"}>
            Another file
          </Button>
        ) : null}
      </BlockHead>
      <DropOverlay over={over} where="Its columns are shown before anything is kept." />
      {file === null ? (
        <Dropzone
          onFiles={added.choose}
          accept=".csv,.tsv,.txt,.xyz,.extxyz,.sdf,.sd,.mol,.gz"
          hint="CSV or TSV: the first column frame or label, every further one a quantity, its unit as name [unit]. Or XYZ or SDF with the same frames at another level, in any order."
        />
      ) : (
        <p role="status" className="text-ink-2">
          <span className="font-medium text-ink">{file.name}</span>
          {busy === "reading" ? " is being read…" : busy === "saving" ? " is being kept…" : ""}
        </p>
      )}
      {refused ? (
        <StatePanel
          tone="danger"
          title={refused.title}
          className="mt-4"
          actions={
            refused.code === NO_SUCH_ATOM && added.fields.perAtom !== "plain" ? (
              <Button onClick={() => added.answer({ perAtom: "plain" })}>
                Take such names as plain columns
              </Button>
            ) : undefined
          }
        >
          <p role="alert">{refused.detail}</p>
        </StatePanel>
      ) : null}
      {preview ? <Looked added={added} preview={preview} /> : null}
    </section>
  );
}

function Looked({ added, preview }: { added: AddedFile; preview: ColumnsPreview }) {
  const { fields, busy } = added;
  const energies = preview.columns.some(({ kind }) => kind === "energy");
  const taken = preview.columns.filter(({ exists }) => exists);
  const replaces = fields.replace === "true";
  const clashes = replaces ? taken.flatMap(({ conflict }) => (conflict === null ? [] : [conflict])) : [];
  const like = preview.columns.flatMap(({ column, name, looksLikeEnergy }) =>
    looksLikeEnergy && column !== null ? [{ column, name }] : [],
  );
  const open = preview.questions.length + like.length;
  return (
    <>
      <p className="mt-2 max-w-read">{preview.match.text}.</p>
      <AnsweredPoints fields={fields} onTakeBack={(id) => added.answer({ [id]: "" })} />
      <OpenPoints
        questions={preview.questions}
        like={like}
        busy={busy !== null}
        onAnswer={added.answer}
        onKind={(column, kind) => added.decide({ column, kind })}
      />
      <FirstRows preview={preview} />
      {preview.type === "structures" ? <FromStructures added={added} /> : null}
      {preview.columns.length > 0 ? (
        <TakenAs preview={preview} choices={added.choices} onDecide={added.decide} />
      ) : null}
      {energies ? <EnergyFacts added={added} /> : null}
      <Messages preview={preview} asked={like.map(({ column }) => column)} />
      {taken.length > 0 ? (
        <Checkbox className="mt-6 max-w-read" checked={replaces} onChange={() => added.putInPlace(!replaces)}>
          Put these numbers in the place of {taken.map(({ name }) => `“${name}”`).join(", ")}, which{" "}
          {taken.length === 1 ? "is" : "are"} there already.
        </Checkbox>
      ) : null}
      {clashes.length > 0 ? (
        <Note tone="held" className="mt-4">
          <ul role="alert" className="grid gap-1">
            {clashes.map((sentence) => (
              <li key={sentence}>{sentence}</li>
            ))}
          </ul>
        </Note>
      ) : null}
      <div className="mt-6 flex flex-wrap items-center gap-4">
        <Button
          kind="primary"
          onClick={added.save}
          disabled={
            busy !== null ||
            open > 0 ||
            preview.columns.length === 0 ||
            (taken.length > 0 && !replaces) ||
            clashes.length > 0
          }
        >
          Add {plural(preview.columns.length, "column")}
        </Button>
        <span className="text-xs text-ink-3">
          {open > 0
            ? `${plural(open, "question")} open above.`
            : "The file is kept, and the logbook says who added what."}
        </span>
      </div>
    </>
  );
}

/** Of a second structure file: how its frames find those of the ensemble, and which of its numbers are taken. */
function FromStructures({ added }: { added: AddedFile }) {
  return (
    <div className="mt-6 grid max-w-[46rem] gap-4 sm:grid-cols-2">
      <SelectField
        label="Frames are matched"
        value={added.fields.match ?? "structure"}
        choices={[
          { value: "structure", label: "by structure" },
          { value: "label", label: "by label" },
          { value: "number", label: "by number" },
        ]}
        onChange={(event) => added.answer({ match: event.currentTarget.value })}
      />
      <SelectField
        label="Taken from the file"
        value={added.fields.kind ?? ""}
        choices={[
          { value: "", label: "its energies: a level" },
          { value: "property", label: "its further numbers: properties" },
        ]}
        onChange={(event) => added.answer({ kind: event.currentTarget.value })}
      />
    </div>
  );
}

/** What the numbers cannot say of themselves. */
function EnergyFacts({ added }: { added: AddedFile }) {
  const { fields } = added;
  const kind = fields.energyKind ?? "";
  const warm = kind === "free" || kind === "enthalpy";
  const text = (name: string) => ({
    defaultValue: fields[name] ?? "",
    maxLength: 120,
    autoComplete: "off",
    onBlur: (event: { currentTarget: { value: string } }) => {
      const value = event.currentTarget.value.trim();
      if (value !== (fields[name] ?? "")) added.answer({ [name]: value });
    },
  });
  return (
    <section className="mt-6">
      <BlockHead title="The energies" />
      <div className="grid max-w-[46rem] gap-4 sm:grid-cols-2">
        <SelectField
          label="Kind"
          value={kind}
          choices={[
            { value: "", label: "not stated: taken as electronic" },
            ...Object.entries(ENERGY_KIND_WORDS).map(([value, label]) => ({ value, label })),
          ]}
          onChange={(event) => added.answer({ energyKind: event.currentTarget.value, energyTemperature: "" })}
        />
        {warm ? (
          <TextField label="At temperature" unit="K" inputMode="decimal" {...text("energyTemperature")} />
        ) : null}
        <TextField label="Level of the geometry, if another" {...text("geometryLevel")} />
        <TextField label="Solvent" {...text("solvent")} />
      </div>
    </section>
  );
}

function Messages({ preview, asked }: { preview: ColumnsPreview; asked: readonly number[] }) {
  // Frames without a row are counted above: a line each would hide everything else. What is asked needs no remark.
  const messages = preview.messages.filter(
    ({ code, frame, column }) =>
      (code !== "C07" || frame === undefined) &&
      !(column !== undefined && code === "C06" && asked.includes(column)),
  );
  if (messages.length === 0) return null;
  const more = messages.length - SHOWN_MESSAGES;
  return (
    <Note tone={messages.some(({ severity }) => severity === "hold") ? "held" : "remark"} className="mt-6">
      <ul className="grid gap-1">
        {messages.slice(0, SHOWN_MESSAGES).map((message, k) => (
          <li key={k}>
            {message.frame === undefined ? "" : `Frame ${message.frame}: `}
            {message.message}
            {message.found === undefined ? "" : ` (“${message.found}”)`}
          </li>
        ))}
        {more > 0 ? <li>{plural(more, "more remark")}.</li> : null}
      </ul>
    </Note>
  );
}
