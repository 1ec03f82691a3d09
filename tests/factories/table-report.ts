import { planTable, type TableAnswers } from "../../app/lib/csv/plan-table.ts";
import { TableReader } from "../../app/lib/csv.server.ts";
import { DomainError } from "../../app/lib/errors.ts";
import { formatMessage } from "../../app/lib/intake/format-message.ts";
import type { IntakeQuestion } from "../../app/lib/intake/report.ts";

/** Nothing stated: what a table says of itself. */
export const NO_ANSWERS: TableAnswers = {
  kind: null,
  level: null,
  energyUnit: null,
  energyKind: null,
  energyTemperature: null,
  rule: null,
  perAtom: null,
  columns: new Map(),
  key: null,
  firstFrame: null,
  labels: null,
  style: null,
  header: null,
};

/** Five frames of methane, the fourth held, that the tables of the acceptance rows belong to. */
export const METHANE = {
  strip: "aaaha",
  labels: new Map([1, 2, 3, 4, 5].map((frame) => [`conf_${frame}`, [frame]])),
  elements: [6, 1, 1, 1, 1],
};

function questionText({ id, code, text, reason, options }: IntakeQuestion): string {
  const choices = options.map((option) => `${option.id}${option.proposed ? " (proposed)" : ""}`);
  return `${code} ${id}: ${text} ${reason ?? ""} ${choices.join(", ")}`;
}

/** What a table of the acceptance rows becomes: its dialect, its columns with their values by frame, what is open, the report. */
export function tableReport(
  name: string,
  bytes: Uint8Array,
  chunk = bytes.length,
  answers = NO_ANSWERS,
): object {
  try {
    const reader = new TableReader({ file: name, style: answers.style, header: answers.header });
    for (let at = 0; at < bytes.length; at += chunk) reader.push(bytes.subarray(at, at + chunk));
    const table = reader.end();
    const plan = planTable(table, METHANE, answers);
    return {
      delimiter: table.delimiter,
      header: table.hasHeader ? table.header : null,
      columns: plan.columns.map(({ name: column, kind, unit, rule, atom, quantity, data }) => ({
        name: column,
        kind,
        unit,
        rule: rule ?? undefined,
        atom: atom ?? undefined,
        quantity: quantity ?? undefined,
        values: Array.from(data.values, (value, k) => (data.present[k] === 1 ? value : null)),
      })),
      leftOut: plan.leftOut.map(({ header, why }) => `${header}: ${why}`),
      match: `${plan.match.matched} matched by ${plan.match.key}, missing ${plan.match.missing.join(" ")}, unknown ${plan.match.unknownCount}`,
      asks: plan.questions.map(questionText),
      says: plan.messages.map((message) => `${message.severity} ${message.code} ${formatMessage(message)}`),
    };
  } catch (error) {
    if (!(error instanceof DomainError)) throw error;
    return { rejected: `${String(error.extra.code)}: ${error.message}` };
  }
}
