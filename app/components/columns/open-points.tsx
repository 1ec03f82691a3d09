import { useState } from "react";
import { Button } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { QuestionCard, QuestionOption } from "~/components/ui/question-card";
import { TextButton } from "~/components/ui/text-link";
import type { ColumnsPreview } from "~/lib/api/schemas";
import { formatCount, formatEnergy, MINUS, withUnit } from "~/lib/format";

type Question = ColumnsPreview["questions"][number];

/** What the file leaves open, one card a question; nothing is kept before they are answered. */
export function OpenPoints({
  questions,
  like,
  busy,
  onAnswer,
  onKind,
}: {
  questions: readonly Question[];
  /** Columns without a unit that look like energies. */
  like: readonly { column: number; name: string }[];
  busy: boolean;
  onAnswer: (fields: Record<string, string>) => void;
  onKind: (column: number, kind: "energy" | "property") => void;
}) {
  const all = questions.length + like.length;
  return (
    <div className="mt-5 grid gap-5">
      {questions.map((question, k) => (
        <PointCard
          key={question.id}
          question={question}
          count={`Question ${k + 1} of ${all}`}
          busy={busy}
          onAnswer={(option) => onAnswer({ [question.id]: option })}
        />
      ))}
      {like.map(({ column, name }, k) => (
        <PointCard
          key={`kind-${column}`}
          question={kindQuestion(column, name)}
          count={`Question ${questions.length + k + 1} of ${all}`}
          busy={busy}
          onAnswer={(option) => onKind(column, option === "energy" ? "energy" : "property")}
        />
      ))}
    </div>
  );
}

function kindQuestion(column: number, name: string): Question {
  return {
    id: `kind-${column}`,
    code: "kind",
    text: `Is “${name}” an energy?`,
    reason: "It looks like one, and its header names no unit.",
    options: [
      { id: "energy", text: "An energy: a level", detail: "Its unit is asked next.", proposed: true },
      { id: "property", text: "A property without a unit" },
    ],
  };
}

function PointCard({
  question,
  count,
  busy,
  onAnswer,
}: {
  question: Question;
  count: string;
  busy: boolean;
  onAnswer: (option: string) => void;
}) {
  const proposed = question.options.find((option) => option.proposed);
  const named = question.id === "level";
  // Until somebody chooses, it follows the proposal: another answer may change what is proposed.
  const [given, setChoice] = useState<string | null>(null);
  const choice = given ?? proposed?.id ?? "";
  return (
    <QuestionCard
      count={count}
      title={question.text}
      reason={question.reason}
      footer={
        <Button
          kind="primary"
          disabled={busy || choice.trim() === ""}
          onClick={() => onAnswer(choice.trim())}
        >
          {named ? "Name the level" : "Use this answer"}
        </Button>
      }
    >
      {named ? (
        <div className="max-w-read px-4 py-4 sm:px-6">
          <TextField
            label="Name of the level of theory"
            value={choice}
            maxLength={120}
            autoComplete="off"
            spellCheck={false}
            placeholder="for example B3LYP/6-31G(d)"
            help={
              question.options.length > 0
                ? question.options.map(({ text, detail }) => `${text} (${detail ?? "in use"})`).join(", ")
                : undefined
            }
            onChange={(event) => setChoice(event.currentTarget.value)}
          />
        </div>
      ) : (
        question.options.map((option) => (
          <QuestionOption
            key={option.id}
            name={`answer-${question.id}`}
            value={option.id}
            checked={choice === option.id}
            onChange={setChoice}
            title={option.text}
            reason={option.detail}
          >
            <OptionFigures option={option} />
          </QuestionOption>
        ))
      )}
    </QuestionCard>
  );
}

/** The numbers of the first frames, and the spread that a unit would mean. */
function OptionFigures({ option }: { option: Question["options"][number] }) {
  const values = (option.values ?? []).filter((value) => value !== null);
  // A candidate's spread belongs to the unit proposed for it; here only a unit's own is asked about.
  const spread = option.values === undefined ? option.spreadKcal : null;
  if (values.length === 0 && typeof spread !== "number") return null;
  return (
    <span className="figures text-right whitespace-nowrap text-ink-2">
      {values.map((value) => value.replaceAll("-", MINUS)).join("  ")}
      {typeof spread === "number" ? (
        <>
          <span className="text-ink-3">spread </span>
          {withUnit(spread > 1000 ? formatCount(spread) : formatEnergy(spread), "kcal/mol")}
        </>
      ) : null}
    </span>
  );
}

const NAMES: Record<string, string> = {
  numbers: "Numbers",
  header: "First row",
  key: "First column",
  firstFrame: "First frame",
  labels: "Labels",
  energyUnit: "Unit",
  energyFrom: "Energy",
  level: "Level",
  perAtom: "Headers of atoms",
  rule: "Rule",
};

/** What was answered, each with a way back. */
export function AnsweredPoints({
  fields,
  onTakeBack,
}: {
  fields: Readonly<Record<string, string>>;
  onTakeBack: (id: string) => void;
}) {
  const answered = Object.entries(fields).filter(([id]) => id in NAMES);
  if (answered.length === 0) return null;
  return (
    <p className="mt-4 flex flex-wrap gap-x-5 gap-y-1 text-ink-2">
      {answered.map(([id, value]) => (
        <span key={id}>
          {NAMES[id]}: <span className="font-medium text-ink">{value}</span>{" "}
          <TextButton onClick={() => onTakeBack(id)}>Change</TextButton>
        </span>
      ))}
    </p>
  );
}
