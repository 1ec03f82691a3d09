import type { z } from "zod";
import { faultsOf } from "../../lib/api/fault-words.ts";
import { DomainError } from "../../lib/errors.ts";

/** 422 of an upload with the field at fault. */
export function invalidField(field: string, message: string): DomainError {
  return new DomainError("invalid", "The upload is not right", message, { faults: [{ field, message }] });
}

/** The fields of a form beside its files, each once. */
export class FormFields<Schema extends z.ZodObject> {
  private readonly schema: Schema;
  private readonly values: Record<string, string> = Object.create(null);
  private readonly allowed: ReadonlySet<string>;

  /** @param beside fields that the schema does not know and `check` leaves out */
  constructor(
    schema: Schema,
    private readonly beside: readonly string[] = [],
  ) {
    this.schema = schema;
    this.allowed = new Set([...Object.keys(schema.shape), ...beside]);
  }

  add(name: string, value: string): void {
    if (name === "file") {
      throw invalidField(
        name,
        'The field "file" came as text, not as a file. Send the file itself: with curl, -F "file=@run3.xyz", the @ before its name.',
      );
    }
    if (!this.allowed.has(name)) {
      throw invalidField(name, `There is no field "${name}". Files go into "file".`);
    }
    if (name in this.values) throw invalidField(name, `The field "${name}" stands twice.`);
    // A form sends what was left empty too.
    if (value.trim() !== "") this.values[name] = value;
  }

  get(name: string): string | null {
    return this.values[name] ?? null;
  }

  check(): z.infer<Schema> {
    const rest = Object.entries(this.values).filter(([name]) => !this.beside.includes(name));
    const read = this.schema.safeParse(Object.fromEntries(rest), { reportInput: true });
    if (read.success) return read.data;
    const faults = faultsOf(read.error);
    const detail = faults.map((fault) => `${fault.field}: ${fault.message}`).join(" ");
    throw new DomainError("invalid", "The upload is not right", detail, { faults });
  }
}
