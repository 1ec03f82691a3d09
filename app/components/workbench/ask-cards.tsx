import { type FormEvent, useRef, useState } from "react";
import { href, useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { WithFormulas } from "~/components/ui/formula";
import { QuestionCard, QuestionOption } from "~/components/ui/question-card";
import { ABSENT, fixed, formatEnergy, withUnit } from "~/lib/format";
import { isEnsembleAsk } from "~/lib/intake/reading-choices";
import { readAskId } from "~/lib/intake/reading-questions";
import type { IntakeQuestion, QuestionOption as Option } from "~/lib/intake/report";
import { moreMayFollow } from "~/lib/workbench/findings";
import { spreadDigits } from "~/lib/workbench/spread-digits";
import type { ActAnswer } from "./act-answer";

/** What intake leaves open, one card a question; nothing is computed before they are answered. */
export function AskCards({
  ensembleId,
  questions,
  mayAnswer,
}: {
  ensembleId: string;
  questions: readonly IntakeQuestion[];
  mayAnswer: boolean;
}) {
  // Counted over all of them, so that the second stays the second once the first is answered.
  const open = questions
    .map((question, k) => ({ question, place: k + 1 }))
    .filter(({ question }) => question.answered === undefined);
  // What answers may bring is not counted before it is there: rail, finding and cards give one number.
  const all = `${questions.length}${moreMayFollow(questions) ? " so far" : ""}`;
  return (
    <div className="mt-7 grid gap-5">
      {open.map(({ question, place }) => (
        <AskCard
          key={question.id}
          ensembleId={ensembleId}
          question={question}
          count={`Question ${place} of ${all}`}
          mayAnswer={mayAnswer}
        />
      ))}
    </div>
  );
}

function AskCard({
  ensembleId,
  question,
  count,
  mayAnswer,
}: {
  ensembleId: string;
  question: IntakeQuestion;
  count: string;
  mayAnswer: boolean;
}) {
  const fetcher = useFetcher<ActAnswer>();
  const proposed = question.options.find((option) => option.proposed) ?? null;
  const [choice, setChoice] = useState(proposed?.id ?? "");
  const chosen = question.options.find((option) => option.id === choice);
  const [missing, setMissing] = useState(false);
  const form = useRef<HTMLFormElement>(null);
  const refused = fetcher.data && !fetcher.data.ok ? fetcher.data.message : undefined;
  const named = question.code === "level";
  const check = (event: FormEvent<HTMLFormElement>) => {
    const given = String(new FormData(event.currentTarget).get("option") ?? "").trim();
    setMissing(given === "");
    if (given !== "") return;
    event.preventDefault();
    form.current?.querySelector<HTMLInputElement>('input[name="option"]')?.focus();
  };
  return (
    <fetcher.Form
      ref={form}
      method="post"
      action={href("/ensembles/:id/intake", { id: ensembleId })}
      onSubmit={check}
    >
      <input type="hidden" name="intent" value="answer" />
      <input type="hidden" name="question" value={question.id} />
      <QuestionCard
        count={count}
        title={question.text}
        reason={question.reason}
        footer={
          mayAnswer ? (
            <>
              {/* Never disabled: without script it sends what was chosen, and the server says what is missing. */}
              <SubmitButton pending={fetcher.state !== "idle"}>
                <WithFormulas>{buttonWords(question, chosen)}</WithFormulas>
              </SubmitButton>
              {refused || (missing && !named) ? (
                <span className="text-danger" role="alert">
                  {refused ?? "Choose one of them first."}
                </span>
              ) : (
                <span>{footWords(question)}</span>
              )}
            </>
          ) : (
            <span>An analyst or an owner of the team answers this.</span>
          )
        }
      >
        {named ? (
          <LevelName
            question={question}
            proposed={proposed}
            missing={missing}
            onTyped={() => setMissing(false)}
          />
        ) : (
          <>
            <OptionHead question={question} />
            {question.options.map((option) => (
              <QuestionOption
                key={option.id}
                name="option"
                value={option.id}
                checked={choice === option.id}
                onChange={(id) => {
                  setChoice(id);
                  setMissing(false);
                }}
                title={<WithFormulas>{option.text}</WithFormulas>}
                reason={option.detail}
              >
                <OptionFigures question={question} option={option} />
              </QuestionOption>
            ))}
          </>
        )}
      </QuestionCard>
    </fetcher.Form>
  );
}

function buttonWords(question: IntakeQuestion, chosen: Option | undefined): string {
  if (question.code === "level") return "Name the level";
  if (!chosen) return "Confirm the choice";
  if (question.id === "group") return `${chosen.proposed ? "Keep" : "Take"} ${chosen.text}`;
  if (question.id === "configuration") {
    return chosen.proposed ? "Keep this configuration" : "Take this configuration";
  }
  if (chosen.id === "comma") return "Read the comma as a decimal point";
  if (readAskId(question.id)) return chosen.id === "hold" ? "Keep them held" : chosen.text;
  if (chosen.id === "none") return "Take the structures without energies";
  return question.code === "energy-unit" ? `Confirm ${chosen.text}` : `Use ${chosen.text}`;
}

function footWords(question: IntakeQuestion): string {
  if (question.code === "energy-unit") return "The factor is printed in every report.";
  if (question.code === "level") return "It keeps one hue and marker wherever it appears.";
  if (isEnsembleAsk(readAskId(question.id)?.ask))
    return "The others stay held; each can become an ensemble of its own.";
  if (readAskId(question.id)) return "The files are read again with this answer.";
  return "One rule for all frames.";
}

/** Any name will do; names that the file or the team already use are one click away. */
function LevelName({
  question,
  proposed,
  missing,
  onTyped,
}: {
  question: IntakeQuestion;
  proposed: Option | null;
  /** It was sent without a name. */
  missing: boolean;
  onTyped: () => void;
}) {
  // Until somebody types, it follows the proposal, which another answer may change.
  const [typed, setName] = useState<string | null>(null);
  const name = typed ?? proposed?.text ?? "";
  const others = question.options.filter(({ text }) => text !== name);
  return (
    <div className="max-w-read px-4 py-4 sm:px-6">
      <TextField
        label="Name of the level of theory"
        name="option"
        aria-required="true"
        error={missing ? "Give the level a name, for example B3LYP/6-31G(d)." : undefined}
        maxLength={120}
        autoComplete="off"
        spellCheck={false}
        value={name}
        onChange={(event) => {
          setName(event.currentTarget.value);
          onTyped();
        }}
        placeholder="for example B3LYP/6-31G(d)"
        help={
          proposed && name === proposed.text
            ? proposed.detail
            : "As the trade writes it; tables, figures and exports carry it."
        }
      />
      {[...new Set(others.map(({ detail }) => detail))].map((where) => (
        <p key={where} className="mt-3 flex flex-wrap items-center gap-2 text-xs text-ink-3">
          {where}:
          {others
            .filter(({ detail }) => detail === where)
            .map((option) => (
              <Button
                key={option.id}
                size="sm"
                onClick={() => {
                  setName(option.text);
                  onTyped();
                }}
              >
                {option.text}
              </Button>
            ))}
        </p>
      ))}
    </div>
  );
}

const VALUES_COLUMNS = "grid-cols-[repeat(3,5.5rem)_4.5rem]";

/** Heads of the figures, where there are any: the first frames and the spread; for units what spread each would mean. */
function OptionHead({ question }: { question: IntakeQuestion }) {
  const values = Math.max(0, ...question.options.map((option) => option.values?.length ?? 0));
  const units = question.options.some((option) => typeof option.spreadKcal === "number");
  if (values === 0 && !units) return null;
  return (
    <div
      aria-hidden="true"
      className={`flex justify-between gap-4 px-4 pt-2 pb-1 text-xs font-medium text-ink-3 sm:px-6 ${values > 0 ? "max-sm:hidden" : ""}`}
    >
      <span className="pl-8">{values > 0 ? "Number" : "Unit"}</span>
      {values > 0 ? (
        <span className={`grid gap-4 text-right ${VALUES_COLUMNS}`}>
          {[1, 2, 3].map((frame) => (
            <span key={frame}>{frame <= values ? `Frame ${frame}` : ""}</span>
          ))}
          <span>Spread</span>
        </span>
      ) : (
        <span>Spread it would mean</span>
      )}
    </div>
  );
}

function OptionFigures({ question, option }: { question: IntakeQuestion; option: Option }) {
  const digits = spreadDigits(question.options.map((one) => one.spread ?? null));
  const spread = option.spreadKcal;
  if (option.values === undefined) {
    return spread === undefined || spread === null ? null : (
      <span className="text-right whitespace-nowrap">
        {withUnit(spread > 1000 ? fixed(spread, 0) : formatEnergy(spread), "kcal/mol")}
        <span className="sr-only"> spread</span>
      </span>
    );
  }
  const asked = question.code === "energy-from";
  return (
    <span
      className={`grid gap-4 text-right max-sm:grid-cols-[repeat(2,auto)] max-sm:justify-start sm:grid-cols-[repeat(3,5.5rem)_4.5rem]`}
    >
      {[0, 1, 2].map((k) => (
        <span key={k} className={`truncate ${k > 0 ? "max-sm:hidden" : ""}`}>
          <span className="sr-only">frame {k + 1}: </span>
          {option.values?.[k]?.replaceAll("-", "\u2212") ?? (asked ? "\u2013" : "")}
        </span>
      ))}
      <span>
        <span className="text-xs text-ink-3 sm:sr-only">spread </span>
        {typeof option.spread === "number" ? fixed(option.spread, digits) : ABSENT}
      </span>
    </span>
  );
}
