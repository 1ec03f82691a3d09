import { type ReactNode, useEffect, useRef } from "react";
import { href, useActionData, useLocation } from "react-router";
import { Finding, SectionHead } from "~/components/ui/finding";
import { KeyFigure, KeyFigures } from "~/components/ui/key-figures";
import { Note } from "~/components/ui/note";
import { TextLink } from "~/components/ui/text-link";
import { capital, formatCount, formatTemperature, withUnit } from "~/lib/format";
import type { EnergiesInForce, IntakeView } from "~/lib/views";
import { heldForOther, intakeFinding } from "~/lib/workbench/findings";
import { ENERGY_KIND_WORDS } from "~/lib/workbench/recipe-words";
import type { ActAnswer } from "./act-answer";
import { AddBatch } from "./add-batch";
import { AskCards } from "./ask-cards";
import { FileMessages, HeldList, RemarkedList } from "./frame-lists";
import { FrameStripFigure } from "./frame-strip-figure";
import { ReadAgain } from "./read-again";
import { useWorkbench } from "./workbench-context";

/** What was read, and what became of every frame. */
export function IntakeSection({ intake }: { intake: IntakeView }) {
  const { ensemble } = useWorkbench();
  const { search } = useLocation();
  const finding = intakeFinding(ensemble, intake);
  // Only a form that was sent without script answers here.
  const answer = useActionData<ActAnswer>();
  const asks = ensemble.openQuestions > 0;
  const said = useRef<HTMLDivElement>(null);
  const before = useRef(ensemble.openQuestions);
  useEffect(() => {
    if (ensemble.openQuestions < before.current) said.current?.focus();
    before.current = ensemble.openQuestions;
  }, [ensemble.openQuestions]);
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Intake"
        aside={<TextLink to={href("/formats")}>What the readers accept</TextLink>}
      />
      {/* Takes the focus when a question is answered: the button that had it is gone, and this is what changed. */}
      <div ref={said} tabIndex={-1} className="outline-none">
        <Finding more={finding.second ?? undefined}>{finding.text}</Finding>
      </div>
      {answer && !answer.ok ? (
        <Note tone="danger" className="mt-4">
          <p role="alert">{answer.message}</p>
        </Note>
      ) : null}
      <KeyFigures>
        <KeyFigure label="Frames" value={formatCount(ensemble.frames)} />
        {asks && ensemble.accepted === 0 ? (
          <KeyFigure label="Wait for an answer" value={formatCount(intake.waiting)} />
        ) : (
          <KeyFigure label="Accepted" value={formatCount(ensemble.accepted)} />
        )}
        <KeyFigure
          label="Of these with a remark"
          value={formatCount(ensemble.remarked)}
          tone={ensemble.remarked > 0 ? "remark" : undefined}
        />
        <KeyFigure
          label={asks && heldForOther(intake) ? "Held for other reasons" : "Held"}
          value={formatCount(ensemble.held - (asks ? intake.waiting : 0))}
          tone={ensemble.held - (asks ? intake.waiting : 0) > 0 ? "held" : undefined}
        />
      </KeyFigures>
      <FrameStripFigure states={intake.strip} />
      {asks ? (
        <AskCards ensembleId={ensemble.id} questions={intake.questions} mayAnswer={ensemble.mayCompute} />
      ) : null}
      <div className="mt-9 grid items-start gap-x-10 gap-y-8 xl:grid-cols-2">
        <HeldList intake={intake} />
        <RemarkedList frames={intake.remarked} />
      </div>
      {ensemble.mayCompute && !(asks && ensemble.accepted === 0) ? (
        <AddBatch numbers={intake.numbers} />
      ) : null}
      <FileMessages messages={intake.messages} files={ensemble.files} />
      <section className="mt-9 print:hidden">
        <h3 className="text-sm font-semibold">Levels and tables</h3>
        <p className="mt-1 max-w-read text-ink-2">
          Further energies and properties of these frames come from a table or a second structure file.{" "}
          <TextLink to={{ pathname: href("/ensembles/:id/columns", { id: ensemble.id }), search }}>
            {ensemble.mayCompute ? "Add a level or a property table" : "See all columns"}
          </TextLink>
        </p>
      </section>
      <InForce intake={intake} />
      {/* While something is asked, the cards above are the way to answer. */}
      {ensemble.mayCompute && ensemble.openQuestions === 0 ? <ReadAgain intake={intake} /> : null}
      {ensemble.chiralityNote ? (
        <Note className="mt-9">
          The molecule counts as{" "}
          {ensemble.chirality === "unsure" ? "chiral, though that is unsure" : ensemble.chirality}.{" "}
          {ensemble.chiralityNote}
        </Note>
      ) : null}
    </section>
  );
}

/** Questions whose answers the energies in force show. */
const OF_ENERGIES = ["energy-from", "energy-unit", "level"];

/** How the files are read: the energies as they stand, whoever said so, and the answers that were given besides. */
function InForce({ intake }: { intake: IntakeView }) {
  const answered = intake.questions.filter(
    ({ code, answered }) =>
      answered !== undefined && !(intake.inForce.length > 0 && OF_ENERGIES.includes(code)),
  );
  if (answered.length === 0 && intake.inForce.length === 0) return null;
  return (
    <section className="mt-9">
      <h3 className="text-sm font-semibold">How the files are read</h3>
      <dl className="mt-2 border-t border-rule">
        {intake.inForce.flatMap((energies) =>
          energyRows(energies).map(([name, words]) => (
            <Row key={`${energies.level} ${name}`} name={name}>
              {words}
            </Row>
          )),
        )}
        {answered.map((question) => (
          <Row key={question.id} name={question.text}>
            {question.options.find((option) => option.id === question.answered)?.text ?? question.answered}
          </Row>
        ))}
      </dl>
    </section>
  );
}

function Row({ name, children }: { name: string; children: ReactNode }) {
  return (
    <div className="flex flex-wrap justify-between gap-x-6 border-b border-rule py-2">
      <dt className="text-ink-2">{name}</dt>
      <dd className="font-medium break-words">{children}</dd>
    </div>
  );
}

function energyRows(energies: EnergiesInForce): [string, string][] {
  const temperature =
    energies.temperature === null ? "" : ` at ${withUnit(formatTemperature(energies.temperature), "K")}`;
  const kind = energies.kindStated
    ? `${capital(ENERGY_KIND_WORDS[energies.kind])}${temperature}`
    : "Not stated, taken as electronic";
  return [
    ["Level of theory", energies.level],
    ["Number that is the energy", numberWords(energies.from)],
    ["Unit", energies.unit],
    ["Kind of the energies", kind],
  ];
}

/** "key:energy" in words, with what a program writes. */
function numberWords(from: string): string {
  const at = from.indexOf(":");
  const [sort, name] = [from.slice(0, at), from.slice(at + 1)];
  if (sort === "number") return `Number ${name} of the comment line (${from})`;
  return `${sort === "field" ? "Field" : "Key"} ${name} (${from})`;
}
