import { SYMBOLS } from "../../app/lib/chem/elements.ts";
import { DomainError } from "../../app/lib/errors.ts";
import { FrameClassifier } from "../../app/lib/intake/classify.ts";
import { boundUnit, classify } from "../../app/lib/intake/energy-words.ts";
import { energiesAsWritten, scanFields } from "../../app/lib/intake/field-energies.ts";
import { formatMessage } from "../../app/lib/intake/format-message.ts";
import type { IntakeMessage } from "../../app/lib/intake/report.ts";
import type { SdfFrame } from "../../app/lib/sdf/frame.ts";
import { SdfReader } from "../../app/lib/sdf.server.ts";

/**
 * What the SDF reader says of one file, and where it holds several records what intake makes of them as an ensemble.
 * Part of the reports that stand beside the fixtures of the acceptance tables.
 */
export function sdfReport(name: string, bytes: Uint8Array, chunk: number): object {
  const reader = new SdfReader({ file: name });
  const frames: SdfFrame[] = [];
  try {
    for (let at = 0; at < bytes.length; at += chunk)
      frames.push(...reader.push(bytes.subarray(at, at + chunk)));
    frames.push(...reader.end());
  } catch (error) {
    if (!(error instanceof DomainError)) throw error;
    return { rejected: `${String(error.extra.code)}: ${error.message}` };
  }
  const sound = frames.filter((frame) => frame.problem === null);
  return {
    frames: frames.map(frameReport),
    file: reader.messages.map(messageText),
    ensemble: sound.length > 1 ? ensembleReport(sound) : undefined,
  };
}

const messageText = (message: IntakeMessage) =>
  `${message.severity} ${message.code} ${formatMessage(message)}`;

function frameReport(frame: SdfFrame): object {
  const { problem, elements, positions, fields } = frame;
  const says = [...(problem ? [problem] : []), ...frame.remarks].map(messageText);
  const molecule = {
    elements: [...elements].map((z) => SYMBOLS[z]).join(" "),
    last: [...positions.slice(-3)],
    bonds: bondsText(frame),
    isotopes: frame.isotopes ? [...frame.isotopes] : undefined,
    labels: frame.labels ?? undefined,
    charges: frame.charges ? [...frame.charges] : undefined,
    radicals: frame.radicals ? [...frame.radicals] : undefined,
    charge: frame.charge,
    multiplicity: frame.multiplicity ?? undefined,
  };
  return {
    number: frame.number,
    lines: `${frame.line} to ${frame.line + frame.lineCount - 1}`,
    label: frame.label,
    comment: frame.comment || undefined,
    form: [
      frame.version,
      frame.dimension === null ? "" : `${frame.dimension}D`,
      frame.chiralFlag ? "chiral" : "",
    ]
      .join(" ")
      .trim(),
    state: problem ? "held" : frame.remarks.length > 0 ? "remarked" : "accepted",
    reason: problem?.reason,
    ...(problem ? {} : molecule),
    fields: fields.size > 0 ? Object.fromEntries(fields) : undefined,
    numbers: numbersText(frame),
    note: frame.note ?? undefined,
    says,
  };
}

/** Atoms from 1 and the type behind them: `1-2:1`. */
function bondsText({ bonds, orders }: SdfFrame): string {
  const pairs = Array.from(
    { length: bonds.length / 2 },
    (_, k) => `${bonds[2 * k]! + 1}-${bonds[2 * k + 1]! + 1}`,
  );
  return pairs.map((pair, k) => `${pair}:${orders?.[k] ?? "?"}`).join(" ");
}

function numbersText({ fields }: SdfFrame): string[] | undefined {
  const scanned = scanFields(fields);
  const found = scanned.numbers.map(
    (number) =>
      `${number.key} = ${number.text}, ${classify(number)}, ${boundUnit(number, scanned) ?? "no unit"}`,
  );
  return found.length > 0 ? found : undefined;
}

function ensembleReport(frames: readonly SdfFrame[]): object {
  const classifier = new FrameClassifier();
  for (const frame of frames) {
    const { number, file, line, elements, isotopes, positions, charge, multiplicity, fields } = frame;
    const energy = energiesAsWritten(fields);
    classifier.add({
      frame: number,
      file,
      line,
      elements,
      isotopes,
      positions,
      charge,
      multiplicity,
      energy,
    });
  }
  const found = classifier.finish();
  return {
    formula: found.formula,
    frames: found.frames.map(({ frame, state, reason, messages }) =>
      [`${frame} ${state}`, reason, ...messages.map(messageText)].filter((part) => part !== null).join("; "),
    ),
    says: found.messages.map(messageText),
  };
}
