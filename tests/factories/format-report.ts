import { SYMBOLS } from "../../app/lib/chem/elements.ts";
import { DomainError } from "../../app/lib/errors.ts";
import { EnergyScan } from "../../app/lib/intake/energies.ts";
import { energyFromQuestion, energyUnitQuestion } from "../../app/lib/intake/energy-questions.ts";
import { energyRemarks } from "../../app/lib/intake/energy-remarks.ts";
import { findUnit } from "../../app/lib/intake/energy-unit-finding.ts";
import { formatMessage } from "../../app/lib/intake/format-message.ts";
import type { IntakeMessage, IntakeQuestion } from "../../app/lib/intake/report.ts";
import { sniff } from "../../app/lib/text/sniff.ts";
import type { XyzFrame } from "../../app/lib/xyz/frame.ts";
import { XyzReader } from "../../app/lib/xyz.server.ts";
import { sdfReport } from "./sdf-report.ts";
import { tableReport } from "./table-report.ts";

/**
 * What the readers say of one file, as the fixtures of the acceptance tables hold it: sniffed format, frames, messages
 * as text, and for rows of section E the energies. For tests and for whoever adds a fixture.
 */
export function readReport(name: string, bytes: Uint8Array, chunk = bytes.length): object {
  const sniffed = sniff(bytes, name);
  const { container, format, refusal, remark } = sniffed;
  const start = { container, format, ...(remark ? { remark: remark.message } : {}) };
  if (refusal) return { ...start, refused: `${refusal.code}: ${refusal.message} ${refusal.hint}` };
  if (container !== "none") return start;
  // Rows of tables, and energies from a second file.
  if (/^(?:C\d\d|E14)/.test(name)) return { ...start, ...tableReport(name, bytes, chunk) };
  if (format === "sdf") return { ...start, ...sdfReport(name, bytes, chunk) };
  const reader = new XyzReader({ file: name });
  const frames: XyzFrame[] = [];
  try {
    for (let at = 0; at < bytes.length; at += chunk)
      frames.push(...reader.push(bytes.subarray(at, at + chunk)));
    frames.push(...reader.end());
  } catch (error) {
    if (!(error instanceof DomainError)) throw error;
    return { ...start, rejected: `${String(error.extra.code)}: ${error.message}` };
  }
  const energies = name.startsWith("E") ? { energies: energyReport(frames) } : {};
  return { ...start, frames: frames.map(frameReport), file: reader.messages.map(messageText), ...energies };
}

function messageText(message: IntakeMessage): string {
  return `${message.severity} ${message.code} ${formatMessage(message)}`;
}

function frameReport(frame: XyzFrame): object {
  const { problem, elements, positions } = frame;
  const says = [...(problem ? [problem] : []), ...frame.remarks].map(messageText);
  const optional = {
    reason: problem?.reason,
    elements: problem ? undefined : [...elements].map((z) => SYMBOLS[z]).join(" "),
    last: problem ? undefined : [...positions.slice(-3)],
    isotopes: frame.isotopes ? [...frame.isotopes] : undefined,
    labels: frame.labels ?? undefined,
    label: frame.label ?? undefined,
    charge: frame.charge ?? undefined,
    multiplicity: frame.multiplicity ?? undefined,
    note: frame.note ?? undefined,
    extra: frame.extra.length > 0 ? frame.extra : undefined,
    keys: frame.keys.size > 0 ? [...frame.keys].map(([key, { value }]) => [key, value]) : undefined,
  };
  return {
    number: frame.number,
    lines: `${frame.line} to ${frame.line + frame.lineCount - 1}`,
    comment: frame.comment,
    state: problem ? "held" : frame.remarks.length > 0 ? "remarked" : "accepted",
    ...optional,
    says,
  };
}

function energyReport(frames: readonly XyzFrame[]): object {
  const scan = new EnergyScan();
  for (const frame of frames) if (!frame.problem) scan.add(frame, frame.comment);
  const findings = scan.finish();
  const elements = frames[0]?.elements ?? new Uint8Array(0);
  const { chosen, verdict } = findings;
  const start = { verdict, chosen: chosen?.from, from: questionText(energyFromQuestion(findings, elements)) };
  if (!chosen) return start;
  const unit = findUnit(chosen, elements);
  const settled = unit.unit ?? unit.proposed;
  const remarks = settled ? energyRemarks(chosen.column, { unit: settled, kindStated: false }) : [];
  const question = questionText(energyUnitQuestion(chosen, unit));
  return { ...start, values: [...chosen.column.values], unit, question, remarks: remarks.map(messageText) };
}

function questionText(question: IntakeQuestion | null): string[] {
  if (!question) return [];
  const options = question.options.map(({ id, detail, values, spreadKcal }) => {
    const spread = typeof spreadKcal === "number" ? ` [${Number(spreadKcal.toPrecision(6))} kcal/mol]` : "";
    return `${id}${values ? ` (${values.join(", ")})` : ""}${spread} ${detail ?? ""}`;
  });
  return [`${question.text} ${question.reason ?? ""}`, ...options];
}
