import { useEffect, useRef, useState } from "react";
import { href, useFetcher } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { SelectField } from "~/components/ui/select-field";
import { showToast } from "~/components/ui/toast";
import { capital, MINUS } from "~/lib/format";
import { readAskId } from "~/lib/intake/reading-questions";
import { ENERGY_UNITS } from "~/lib/units";
import type { IntakeView } from "~/lib/views";
import { inPageWords } from "~/lib/workbench/page-words";
import { ENERGY_KIND_WORDS } from "~/lib/workbench/recipe-words";
import type { ActAnswer } from "./act-answer";
import { useWorkbench } from "./workbench-context";

const UNITS = [
  { value: "", label: "ask again" },
  // Those that a request may state.
  ...ENERGY_UNITS.slice(0, 4).map((unit) => ({ value: unit, label: unit })),
];
const KINDS = [
  { value: "", label: "not stated, taken as electronic" },
  ...Object.entries(ENERGY_KIND_WORDS).map(([value, words]) => ({ value, label: capital(words) })),
];

/** Fields that answer what intake asked of the files begin so, then comes the question's id. */
export const REREAD_ANSWER = "answer:";

/** A wrong number, unit or level is put right: the stored files are read again with other answers. */
export function ReadAgain({ intake }: { intake: IntakeView }) {
  const { ensemble } = useWorkbench();
  const fetcher = useFetcher<ActAnswer>();
  const answer = fetcher.data;
  const told = useRef(answer);
  useEffect(() => {
    if (told.current === answer) return;
    told.current = answer;
    if (answer?.ok) showToast({ tone: "done", badge: "read again", text: READ_AGAIN });
  }, [answer]);
  return (
    <details className="mt-4 print:hidden">
      <summary className="cursor-pointer py-1 text-link pointer-coarse:py-3">
        Read again with other answers
      </summary>
      <fetcher.Form
        method="post"
        action={href("/ensembles/:id/intake", { id: ensemble.id })}
        className="mt-3 grid max-w-read gap-4"
      >
        <input type="hidden" name="intent" value="reread" />
        <p className="text-ink-2">
          The stored files are read once more. Frames held or released by hand stay as they were decided; what
          is left empty here is asked again.
        </p>
        <AnswerFields key={ensemble.changedAt} intake={intake} />
        <div className="flex flex-wrap items-center gap-x-4 gap-y-2">
          <SubmitButton pending={fetcher.state !== "idle"}>Read again</SubmitButton>
          {answer?.message !== undefined && fetcher.state === "idle" ? (
            <span role="alert" className="text-danger">
              {inPageWords(answer.message)}
            </span>
          ) : null}
        </div>
      </fetcher.Form>
    </details>
  );
}

const READ_AGAIN = "The files were read again with these answers; the logbook names those before.";

/** Numbers of the first frames, and the one that is named now wherever it stands. */
function numberChoices({ numbers, energyFrom }: IntakeView) {
  const found = numbers.map(({ from, name, example }) => ({
    value: from,
    label: example === null ? name : `${name} (${example.replaceAll("-", MINUS)})`,
  }));
  const named =
    energyFrom !== null && energyFrom !== "none" && !numbers.some(({ from }) => from === energyFrom);
  return [
    { value: "", label: "the only one there is, else ask" },
    ...found,
    ...(named ? [{ value: energyFrom, label: energyFrom.slice(energyFrom.indexOf(":") + 1) }] : []),
    { value: "none", label: "none: take the structures without energies" },
  ];
}

/** As the ensemble was read until now, where that is known. */
function AnswerFields({ intake }: { intake: IntakeView }) {
  const { ensemble } = useWorkbench();
  const answered = (code: string) => intake.questions.find((question) => question.code === code)?.answered;
  const level = ensemble.levels[0];
  // The reader remarks where nobody said what kind they are; what nobody said is not put into anybody's mouth.
  const unsaid = intake.messages.some(({ code }) => code === "E13");
  const [kind, setKind] = useState<string>(unsaid ? "" : (level?.energyKind ?? ""));
  const unit = UNITS.find(({ value }) => value === (answered("energy-unit") ?? level?.unit))?.value ?? "";
  return (
    <div className="grid gap-4 sm:grid-cols-2">
      <TextField
        label="Name of the level of theory"
        name="level"
        maxLength={120}
        autoComplete="off"
        spellCheck={false}
        defaultValue={level?.name ?? ""}
      />
      <SelectField label="Unit of the energies" name="energyUnit" choices={UNITS} defaultValue={unit} />
      <SelectField
        label="Which number is the energy"
        name="energyFrom"
        choices={numberChoices(intake)}
        defaultValue={intake.energyFrom ?? ""}
        help="With its value in the first frame that has it. One rule for all frames."
      />
      <SelectField
        label="Kind of the energies"
        name="energyKind"
        choices={KINDS}
        value={kind}
        onChange={(event) => setKind(event.currentTarget.value)}
      />
      {intake.questions
        .filter(({ id, answered }) => answered !== undefined && readAskId(id) !== null)
        .map(({ id, text, options, answered }) => (
          <SelectField
            key={id}
            label={text}
            name={`${REREAD_ANSWER}${id}`}
            choices={[
              { value: "", label: "ask again" },
              ...options.map((option) => ({ value: option.id, label: option.text })),
            ]}
            defaultValue={answered}
          />
        ))}
      {kind === "free" ? (
        <TextField
          label="Temperature of the free energies"
          name="energyTemperature"
          unit="K"
          inputMode="decimal"
          defaultValue={level?.temperature ?? ""}
        />
      ) : null}
    </div>
  );
}
