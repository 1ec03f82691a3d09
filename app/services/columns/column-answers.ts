import { faultsOf } from "../../lib/api/fault-words.ts";
import { type ColumnFields, columnChoicesSchema, columnFieldsSchema } from "../../lib/api/schemas.ts";
import type { Delimiter } from "../../lib/csv/dialect.ts";
import type { ColumnChoice } from "../../lib/csv/plan-column.ts";
import type { TableAnswers } from "../../lib/csv/plan-table.ts";
import { DomainError } from "../../lib/errors.ts";

/** 422 of a call with the field at fault. */
export function invalidColumns(field: string, message: string): DomainError {
  return new DomainError("invalid", "The columns are not right", message, { faults: [{ field, message }] });
}

/** The fields of a form beside its file, each once. */
export class ColumnForm {
  private readonly values: Record<string, string> = Object.create(null);

  add(name: string, value: string): void {
    if (!Object.hasOwn(columnFieldsSchema.shape, name)) {
      throw invalidColumns(name, `There is no field "${name}". The file goes into "file".`);
    }
    if (name in this.values) throw invalidColumns(name, `The field "${name}" stands twice.`);
    if (value.trim() !== "") this.values[name] = value;
  }

  check(): ColumnFields {
    const read = columnFieldsSchema.safeParse({ ...this.values }, { reportInput: true });
    if (read.success) return read.data;
    const faults = faultsOf(read.error);
    const detail = faults.map((fault) => `${fault.field}: ${fault.message}`).join(" ");
    throw new DomainError("invalid", "The columns are not right", detail, { faults });
  }
}

const DELIMITERS: Record<NonNullable<ColumnFields["delimiter"]>, Delimiter> = {
  comma: ",",
  semicolon: ";",
  tab: "\t",
  bar: "|",
};

export function delimiterOf(fields: ColumnFields): Delimiter | null {
  return fields.delimiter === undefined ? null : DELIMITERS[fields.delimiter];
}

/** Choices for single columns, from their JSON. */
function choicesOf(text: string | undefined): Map<number, ColumnChoice> {
  if (text === undefined) return new Map();
  let data: unknown;
  try {
    data = JSON.parse(text);
  } catch {
    throw invalidColumns("columns", 'This is no JSON: write [{"column": 2, "name": "..."}].');
  }
  const read = columnChoicesSchema.safeParse(data, { reportInput: true });
  if (!read.success) {
    const [first] = faultsOf(read.error);
    throw invalidColumns("columns", `${first?.field ?? ""}: ${first?.message ?? ""}`.replace(/^: /, ""));
  }
  return new Map(read.data.map((choice) => [choice.column, choice]));
}

/** What a call states, as the core takes it. */
export function tableAnswers(fields: ColumnFields): TableAnswers {
  return {
    kind: fields.kind ?? null,
    level: fields.level ?? null,
    energyUnit: fields.energyUnit ?? null,
    energyKind: fields.energyKind ?? null,
    energyTemperature: fields.energyTemperature ?? null,
    rule: fields.rule ?? null,
    perAtom: fields.perAtom ?? null,
    columns: choicesOf(fields.columns),
    key: fields.key ?? null,
    firstFrame: fields.firstFrame === undefined ? null : fields.firstFrame === "0" ? 0 : 1,
    labels: fields.labels ?? null,
    style: fields.numbers ?? null,
    header: fields.header === undefined ? null : fields.header === "first",
  };
}

/** What was stated, for the logbook. */
export function statedAnswers(fields: ColumnFields): Record<string, string> {
  const { preview: _, columns: __, ...rest } = fields;
  return Object.fromEntries(Object.entries(rest).map(([name, value]) => [name, String(value)]));
}
