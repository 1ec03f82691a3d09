import { DomainError } from "../errors.ts";
import { formatMessage } from "./format-message.ts";
import type { IntakeMessage } from "./report.ts";

/** A file that is refused as a whole; nothing of it is stored but the report. `report.code` is the row of the tables. */
export class IntakeRejection extends DomainError {
  readonly report: IntakeMessage;

  constructor(report: Omit<IntakeMessage, "severity">) {
    const full: IntakeMessage = { ...report, severity: "reject" };
    const { file, frame, line } = full;
    super("invalid", "The file was not taken in", formatMessage(full), {
      faults: [{ file, frame, line, message: formatMessage(full) }],
      extra: { code: full.code },
    });
    this.name = "IntakeRejection";
    this.report = full;
  }
}
