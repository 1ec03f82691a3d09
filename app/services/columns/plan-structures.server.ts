import { and, asc, eq, inArray, isNull, or } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { frames } from "../../db/schema.server.ts";
import type { ColumnFields } from "../../lib/api/schemas.ts";
import { initialRule, ruleAgainstUnit } from "../../lib/averages/rule.ts";
import { DomainError } from "../../lib/errors.ts";
import { formatCount, plural } from "../../lib/format.ts";
import { decideEnergies, type EnergyAnswers } from "../../lib/intake/decide-energies.ts";
import { MessageList } from "../../lib/intake/message-list.ts";
import { IntakeRejection } from "../../lib/intake/reject.ts";
import type { IntakeMessage, IntakeQuestion } from "../../lib/intake/report.ts";
import { type NewColumn, settleEnergies } from "../../lib/intake/settle-energies.ts";
import type { FrameMatches } from "../../lib/levels/match-frames.ts";
import { type MatchFacts, matchMessages, matchSummary } from "../../lib/levels/match-words.ts";
import { DEFAULT_RMSD_TOLERANCE, type SiftRecipe } from "../../lib/recipe/recipe.ts";
import { quoteFound } from "../../lib/text/escape.ts";
import { levelsInUse } from "../ensembles/intake-rows.server.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";
import { computeMatch } from "../jobs/pool.server.ts";
import { findSift } from "../sifts/find-sift.server.ts";
import { invalidColumns } from "./column-answers.ts";
import type { FilePlan, PlannedToStore } from "./plan.ts";
import { type ReadStructures, readStructures } from "./read-structures.server.ts";
import type { TargetEnsemble } from "./target.server.ts";

/** Frames of the ensemble's molecule that may have a partner: the accepted, and those that a person may release. */
async function ownFrames(ensembleId: string) {
  const mayBeReleased = ["by-hand", "waits-for-answer", "far-off"];
  return db
    .select({ number: frames.number, index: frames.indexInShape, label: frames.label })
    .from(frames)
    .where(
      and(
        eq(frames.ensembleId, ensembleId),
        eq(frames.shape, 0),
        or(isNull(frames.holdReason), inArray(frames.holdReason, mayBeReleased)),
      ),
    )
    .orderBy(asc(frames.number));
}

type Own = Awaited<ReturnType<typeof ownFrames>>;
type MatchRule = Pick<SiftRecipe, "atoms" | "symmetry"> & { tolerance: number; mirror: boolean };

/** The tolerance of the sift at hand, or the defaults. */
async function ruleOf(target: TargetEnsemble, siftId: string | undefined): Promise<MatchRule> {
  if (siftId === undefined) {
    const mirror = target.row.chirality === "achiral";
    return { atoms: "heavy+polarH", symmetry: true, tolerance: DEFAULT_RMSD_TOLERANCE, mirror };
  }
  const sift = await findSift(siftId).catch(() => null);
  if (sift?.ensembleId !== target.ensembleId) throw invalidColumns("sift", "This ensemble has no such sift.");
  const { atoms, symmetry, rmsdTolerance, mirror } = sift.recipe;
  return { atoms, symmetry, tolerance: rmsdTolerance, mirror: mirror === "merge" };
}

async function matchByStructure(
  target: TargetEnsemble,
  own: Own,
  read: ReadStructures,
  rule: MatchRule,
): Promise<FrameMatches> {
  const { graph, ensembleId } = target;
  const indices = own.map(({ index }) => index ?? 0);
  const positions = await loadPositions(ensembleId, graph.elements.length, indices);
  return computeMatch({
    elements: graph.elements,
    isotopes: graph.isotopes,
    bonds: graph.bonds,
    own: { positions, numbers: Int32Array.from(own, ({ number }) => number) },
    // The arrays move to the thread; what is asked of the file later are its numbers.
    other: { positions: read.positions, numbers: read.numbers.slice() },
    ...rule,
  });
}

/** Frames with the same number, or the same label, whatever their structures. */
function matchByName(own: Own, read: ReadStructures, by: "label" | "number", file: string): FrameMatches {
  const rowsOf = new Map<string, number[]>();
  read.numbers.forEach((number, row) => {
    const key = by === "number" ? String(number) : (read.labels[row] ?? "").trim();
    if (key !== "") rowsOf.set(key, [...(rowsOf.get(key) ?? []), row]);
  });
  const double = [...rowsOf].find(([, rows]) => rows.length > 1);
  if (double !== undefined) {
    const numbers = double[1].slice(0, 10).map((row) => read.numbers[row]);
    throw new IntakeRejection({
      code: "C08",
      file,
      found: quoteFound(double[0]),
      message: `The same label stands on several frames: ${numbers.join(", ")}.`,
      hint: "Match by structure or by number.",
    });
  }
  const partner = Int32Array.from(own, ({ number, label }) => {
    const key = by === "number" ? String(number) : (label ?? "").trim();
    return key === "" ? -1 : (rowsOf.get(key)?.[0] ?? -1);
  });
  return {
    partner,
    rmsd: new Float64Array(own.length),
    how: new Uint8Array(own.length),
    shared: [],
    sharedOther: [],
    inOrder: false,
    complete: true,
    pairs: 0,
  };
}

function answersOf(fields: ColumnFields): EnergyAnswers {
  return {
    energyUnit: fields.energyUnit ?? null,
    energyFrom: fields.energyFrom ?? null,
    level: fields.level ?? null,
    energyKind: fields.energyKind ?? "electronic",
    energyTemperature: fields.energyTemperature ?? null,
  };
}

interface Settled {
  columns: NewColumn[];
  leftOut: FilePlan["leftOut"];
  questions: IntakeQuestion[];
  messages: IntakeMessage[];
}

/** The questions of intake under the names of the fields that answer them here. */
const FIELD_OF: Record<string, string> = {
  "energy-from": "energyFrom",
  "energy-unit": "energyUnit",
  level: "level",
};

/** Row X22, under the field that also says how a table writes numbers. */
function commaQuestion({ of, frames, example }: NonNullable<ReadStructures["commas"]>): IntakeQuestion {
  const what = of === "coordinates" ? "Coordinates" : "Numbers";
  const otherwise = of === "coordinates" ? "these frames are left out" : "these frames have no value";
  return {
    id: "numbers",
    code: "X22",
    text: "Is the comma a decimal comma?",
    reason: `${what} of ${plural(frames, "frame")} are written with a comma, such as "${quoteFound(example)}". Nothing is guessed.`,
    options: [
      { id: "comma", text: "Decimal comma: 1234,5", proposed: true },
      {
        id: "point",
        text: "Decimal point: 1234.5",
        detail: `"${quoteFound(example)}" then is text: ${otherwise}.`,
      },
    ],
  };
}

/** Columns over the frames of the file: its energies, or with `kind=property` its further numbers. */
async function settle(
  name: string,
  read: ReadStructures,
  target: TargetEnsemble,
  fields: ColumnFields,
): Promise<Settled> {
  // Asked by itself: what else is open hangs on how the numbers read.
  if (read.commas) {
    return { columns: [], leftOut: [], questions: [commaQuestion(read.commas)], messages: [] };
  }
  const findings = read.scan.finish();
  const answers = answersOf(fields);
  const asked = fields.preview === true;
  const wantsProperties = fields.kind === "property";
  const decision = decideEnergies(
    findings,
    target.graph.elements,
    wantsProperties ? { ...answers, energyFrom: "none" } : answers,
    {
      refuseOpen: !asked,
      confirmUnit: asked,
      knownLevels: asked ? await levelsInUse(target.teamId) : [],
      comment: read.firstComment,
    },
  );
  if (decision.kind === "ask") {
    const questions = decision.questions.map((one) => ({ ...one, id: FIELD_OF[one.id] ?? one.id }));
    return { columns: [], leftOut: [], questions, messages: [] };
  }
  const settled = settleEnergies(decision, {
    findings,
    answers,
    kindStated: fields.energyKind !== undefined,
    extended: read.extended,
    frames: read.frames,
    accepted: () => true,
  });
  const wanted = wantsProperties ? "property" : "energy";
  const columns = settled.columns.filter(({ kind }) => kind === wanted);
  const others = settled.columns.filter(({ kind }) => kind !== wanted);
  if (columns.length === 0) {
    const what = wantsProperties ? "further numbers" : "energy";
    throw new IntakeRejection({
      code: "E10",
      file: name,
      message: `The frames of the file hold no ${what}.`,
      hint: "If one of their numbers is meant, name it with energyFrom.",
    });
  }
  const messages = settled.messages.filter(({ code }) => code !== "E10" || !wantsProperties);
  const leftOut = others.map(({ name: header }) => ({
    column: null,
    header,
    why: "only the energies are taken; the others come as properties, with kind=property",
  }));
  return { columns, leftOut, questions: [], messages: [...messages, ...leftOutRemark(name, others)] };
}

function leftOutRemark(file: string, others: readonly NewColumn[]): IntakeMessage[] {
  if (others.length === 0) return [];
  const names = others.slice(0, 5).map(({ name }) => `"${quoteFound(name)}"`);
  const more = others.length > 5 ? ` and ${others.length - 5} more` : "";
  return [
    {
      code: "S19",
      severity: "remark",
      file,
      message: `Further numbers of the frames were not taken: ${names.join(", ")}${more}.`,
      hint: "Send the file again with kind=property to add them.",
    },
  ];
}

/** A column over the frames of the file as one over those of the ensemble. */
function carried(
  column: NewColumn,
  own: Own,
  read: ReadStructures,
  matches: FrameMatches,
  frameCount: number,
) {
  const values = new Float64Array(frameCount);
  const present = new Uint8Array(frameCount);
  own.forEach(({ number }, row) => {
    const partner = matches.partner[row] ?? -1;
    if (partner < 0) return;
    const from = (read.numbers[partner] ?? 1) - 1;
    if (column.data.present[from] !== 1) return;
    values[number - 1] = column.data.values[from] ?? 0;
    present[number - 1] = 1;
  });
  return { values, present };
}

/** Messages on frames of the file, told of the frame of the ensemble that they belong to. */
function carriedMessages(
  messages: readonly IntakeMessage[],
  own: Own,
  read: ReadStructures,
  matches: FrameMatches,
): IntakeMessage[] {
  const ownOf = new Map<number, number>();
  own.forEach(({ number }, row) => {
    const partner = matches.partner[row] ?? -1;
    if (partner >= 0) ownOf.set(read.numbers[partner] ?? 0, number);
  });
  return messages.flatMap((message) => {
    if (message.frame === undefined) return [message];
    const frame = ownOf.get(message.frame);
    return frame === undefined ? [] : [{ ...message, frame }];
  });
}

function noneMatched(name: string, read: ReadStructures, rule: MatchRule, by: string): IntakeRejection {
  const how =
    by === "structure"
      ? `lies within ${rule.tolerance} Å of a frame of the ensemble`
      : `has the ${by} of a frame of the ensemble`;
  const hint =
    by === "structure"
      ? "If the geometries moved further, match by number or label (match=number, match=label)."
      : "Match by structure instead.";
  return new IntakeRejection({
    code: "E14",
    file: name,
    message: `None of the ${plural(read.numbers.length, "frame")} of the file ${how}.`,
    hint,
  });
}

/** Reads a structure file, matches its frames and says what its numbers would become. */
export async function planStructureFile(
  name: string,
  format: "xyz" | "sdf" | "unknown",
  bytes: AsyncIterable<Uint8Array>,
  target: TargetEnsemble,
  fields: ColumnFields,
): Promise<FilePlan> {
  const rule = await ruleOf(target, fields.sift);
  const read = await readStructures(name, format, bytes, target, fields);
  if (read.numbers.length === 0) {
    const [first] = read.messages.filter(({ severity }) => severity === "hold");
    throw new DomainError(
      "invalid",
      "No frame can be used",
      `None of the ${plural(read.frames, "frame")} of ${name} is a conformer of ${target.row.formula} as this ensemble has it. ${first?.message ?? ""}`.trim(),
      { faults: first ? [{ file: name, frame: first.frame, line: first.line, message: first.message }] : [] },
    );
  }
  const settled = await settle(name, read, target, fields);
  const own = await ownFrames(target.ensembleId);
  const by = fields.match ?? "structure";
  const matches =
    by === "structure" ? await matchByStructure(target, own, read, rule) : matchByName(own, read, by, name);
  const facts: MatchFacts = {
    file: name,
    ownNumbers: Int32Array.from(own, ({ number }) => number),
    otherNumbers: read.numbers,
    lines: read.lines,
    accepted: (frame) => target.strip[frame - 1] !== "h",
    tolerance: rule.tolerance,
  };
  const matched = matches.partner.reduce((sum, partner) => sum + (partner >= 0 ? 1 : 0), 0);
  if (matched === 0) throw noneMatched(name, read, rule, by);
  const list = new MessageList();
  list.addAll(read.messages.map((message) => fileMessage(message)));
  list.addAll(carriedMessages(settled.messages, own, read, matches));
  list.addAll(byWords(matchMessages(matches, facts), by));
  const missing = own.filter(
    ({ number }, row) => (matches.partner[row] ?? -1) < 0 && target.strip[number - 1] !== "h",
  ).length;
  return {
    type: "structures",
    delimiter: null,
    header: [],
    rows: [],
    columns: settled.columns.map((column): PlannedToStore => {
      const data = carried(column, own, read, matches, target.strip.length);
      return toStore(column, data, name, fields);
    }),
    leftOut: settled.leftOut,
    match: {
      by,
      text:
        by === "structure"
          ? matchSummary(matches, facts)
          : `${formatCount(matched)} of ${plural(read.numbers.length, "frame")} of the file matched by ${by}`,
      rows: read.frames,
      matched,
      missing,
      unknown: read.frames - matched,
      shared: matches.shared.length + matches.sharedOther.length,
    },
    questions: settled.questions,
    messages: list.messages(),
  };
}

/** Frames of the file are no frames of the ensemble: their numbers go into the words. */
function fileMessage({ frame, ...message }: IntakeMessage): IntakeMessage {
  return frame === undefined
    ? message
    : { ...message, message: `Frame ${frame} of the file: ${message.message}` };
}

function byWords(messages: IntakeMessage[], by: string): IntakeMessage[] {
  if (by === "structure") return messages;
  return messages.map((message) => ({
    ...message,
    message: message.message.replace(
      /No frame of (.+) lies within .* Å of it;/,
      `No frame of $1 has its ${by};`,
    ),
  }));
}

/** The rule asked for, where the unit of the column does not speak against it; else that of its unit. */
function ruleFor({ name, kind, unit }: NewColumn, fields: ColumnFields): PlannedToStore["rule"] {
  if (kind === "energy") return undefined;
  const rule = fields.rule ?? initialRule(unit);
  const against = ruleAgainstUnit(rule, unit);
  if (against === null) return rule;
  throw invalidColumns("rule", `${rule} averages ${against}; "${quoteFound(name)}" is in ${unit}.`);
}

function toStore(
  column: NewColumn,
  data: PlannedToStore["data"],
  name: string,
  fields: ColumnFields,
): PlannedToStore {
  const rule = ruleFor(column, fields);
  return {
    column: null,
    header: column.name,
    why: column.unit === null ? "no unit" : "unit as stated or beside the number",
    name: column.name,
    kind: column.kind,
    unit: column.unit,
    data,
    origin: `structures:${name}`,
    ...(rule === undefined ? {} : { rule }),
    energyKind: fields.energyKind ?? "electronic",
    temperature: fields.energyTemperature ?? null,
    kindStated: fields.energyKind !== undefined,
    geometryLevel: column.kind === "energy" ? (fields.geometryLevel ?? null) : null,
    solvent: fields.solvent ?? null,
  };
}
