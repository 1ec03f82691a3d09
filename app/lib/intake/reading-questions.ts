import { formatCount, plural } from "../format.ts";
import type { ConfigurationChoice } from "./configurations.ts";
import { ASK_CODES, type Ask, type FrameAsk, HOLD, type OpenReading } from "./reading-choices.ts";
import type { IntakeMessage, IntakeQuestion, QuestionOption } from "./report.ts";

/** Frames whose preview a question shows. */
export const PREVIEWS = 3;

/** One molecule of several in the files of an upload. */
export interface MoleculeChoice {
  /** The first frame of it, by which it is chosen. */
  readonly frame: number;
  readonly frames: number;
  readonly formula: string;
  readonly charge: number | null;
  /** In what it differs from others of its formula and charge; null where these tell it apart. */
  readonly difference: string | null;
  /** The one that most frames have. */
  readonly proposed: boolean;
}

interface Words {
  text: string;
  reason(frames: string): string;
  options: readonly (readonly [id: string, text: string, detail: string])[];
}

const KEEP_HELD: readonly [string, string, string] = [
  HOLD,
  "Keep these frames held",
  "Nothing of them is used.",
];

const WORDS: Record<FrameAsk, Words> = {
  lengths: {
    text: "Are these coordinates in bohr?",
    reason: (frames) =>
      `${frames} look like bohr, or name it, and the format has no mark for the unit. Below: the shortest distance of the first atom.`,
    options: [
      ["bohr", "Bohr", "Converted to Å: 1 bohr is 0.529177210544 Å."],
      ["angstrom", "Å", "Taken as they stand."],
      KEEP_HELD,
    ],
  },
  "decimal-comma": {
    text: "Is the comma a decimal comma?",
    reason: (frames) => `Coordinates of ${frames} are written with a comma. Below: the first of them.`,
    options: [["comma", "Decimal comma", "Read as a decimal point, in all these files."], KEEP_HELD],
  },
  "index-column": {
    text: "Is the first column a running number?",
    reason: (frames) =>
      `Lines of ${frames} begin with a number before the element. Below: the first of them.`,
    options: [["index", "A running number", "Left out; the lines are read as element, x, y, z."], KEEP_HELD],
  },
  capitals: {
    text: "What do the names in capitals mean?",
    reason: (frames) =>
      `Names such as CA in ${frames} can be an atom's label or the symbol of an element. The proposal follows the bond lengths.`,
    options: [
      ["label", "Labels: the first letter is the element", "CA is a carbon named A."],
      ["element", "Symbols of two letters", "CA is calcium."],
      KEEP_HELD,
    ],
  },
  hydrogens: {
    text: "Use structures whose hydrogens have no coordinates?",
    reason: (frames) =>
      `The bonds of ${frames} leave room for hydrogens that are not listed. None is ever added.`,
    options: [
      [HOLD, "Keep these frames held", "Nothing of them is used."],
      ["heavy", "Use the atoms that are listed", "Every result is marked as one of the heavy atoms only."],
    ],
  },
  order: {
    text: "Map atoms in another order by their bonds?",
    reason: (frames) =>
      `${frames} hold the same molecule with its atoms in another order. Below: how the first atoms would be mapped.`,
    options: [
      [
        "map",
        "Map them",
        "Each frame is put into the order of the others; the mapping goes along into exports.",
      ],
      KEEP_HELD,
    ],
  },
};

/** Batches beyond the first have questions of their own. */
export function askId(ask: Ask, batch: number): string {
  return batch === 0 ? ask : `${ask}-${batch + 1}`;
}

/** What a question's id asks, and of which batch (from 0); null for one about energies. */
export function readAskId(id: string): { ask: Ask; batch: number } | null {
  const parts = /^([a-z-]+?)(?:-([1-9]\d*))?$/.exec(id);
  const ask = (Object.keys(ASK_CODES) as Ask[]).find((one) => one === parts?.[1]);
  return ask === undefined ? null : { ask, batch: parts?.[2] === undefined ? 0 : Number(parts[2]) - 1 };
}

/**
 * The question for what frames leave open of their reading, with what each option makes of the first three.
 *
 * @param frames that wait for it
 * @param first their readings, in file order
 * @example readingQuestion("lengths", 12, first, 0).options.map((option) => option.id) // "bohr", "angstrom", "hold"
 */
export function readingQuestion(
  ask: FrameAsk,
  frames: number,
  first: readonly OpenReading[],
  batch: number,
): IntakeQuestion {
  const { text, reason, options } = WORDS[ask];
  const proposed = first[0]?.proposed;
  const toOption = ([id, words, detail]: readonly [string, string, string]): QuestionOption => ({
    id,
    text: words,
    detail: id === proposed ? `Proposed. ${detail}` : detail,
    values: first.slice(0, PREVIEWS).map(({ shown }) => shown[id] ?? null),
    proposed: id === proposed,
  });
  return {
    id: askId(ask, batch),
    code: ASK_CODES[ask],
    text,
    reason: first[0]?.of === "energy" ? commaReason(frames) : reason(plural(frames, "frame")),
    options: options.map(toOption),
  };
}

function commaReason(frames: number): string {
  return `Energies of ${plural(frames, "frame")} are written with a comma, their coordinates with a point. Below: the first of them.`;
}

/** What is said of a frame that waits for an answer. */
export function waitingMessage(ask: FrameAsk): Pick<IntakeMessage, "code" | "severity" | "message" | "hint"> {
  return {
    code: ASK_CODES[ask],
    severity: "question",
    message: `The frame waits for an answer: ${WORDS[ask].text}`,
    hint: "It takes no part until that is answered, or somebody releases it.",
  };
}

/** What is said of a frame that an answer holds. */
export function heldMessage(ask: FrameAsk): Pick<IntakeMessage, "code" | "severity" | "message" | "hint"> {
  return {
    code: ASK_CODES[ask],
    severity: "hold",
    message: `The answer was to keep such frames held: ${WORDS[ask].text}`,
    hint: "Write the file so that it does not leave this open, and take it in again.",
  };
}

const charged = (charge: number | null) =>
  charge === null || charge === 0 ? "" : `, charge ${charge > 0 ? "+" : "−"}${Math.abs(charge)}`;

/** "Which molecule is the ensemble?" (rows X12, S21). */
export function groupQuestion(molecules: readonly MoleculeChoice[], inSdf: boolean): IntakeQuestion {
  return {
    id: "group",
    code: inSdf ? "S21" : "X12",
    text: "Which molecule is the ensemble?",
    reason:
      "The files hold several. The one with most frames was taken and the others are held; those of the one you choose are used instead.",
    options: molecules.map(({ frame, frames, formula, charge, difference, proposed }) => ({
      id: `frame:${frame}`,
      text: `${formula}${charged(charge)}${difference === null ? "" : ` (${difference})`}`,
      detail: `${proposed ? "Proposed: taken now. " : ""}${plural(frames, "frame")}, the first is ${formatCount(frame)}.`,
      proposed,
    })),
  };
}

/** "Which configuration is the ensemble?" (row S23). Whatever is chosen, the others stay held. */
export function configurationQuestion(configurations: readonly ConfigurationChoice[]): IntakeQuestion {
  const [taken, ...others] = configurations;
  const differing = others.map(({ first, frames, words }) => `${firstFrames(first, frames)}: ${words}`);
  const most = others.every(({ frames }) => frames < (taken?.frames ?? 0));
  return {
    id: "configuration",
    code: ASK_CODES.configuration,
    text: "Which configuration is the ensemble?",
    reason: `${differing.join(". ")}; elsewhere ${lowerFirst(taken?.words ?? "")}. The one ${most ? "with most frames" : "that comes first"} was taken and the others are held; those of the one you choose are used instead. Nothing is averaged across configurations.`,
    options: configurations.map(({ first, frames, words }, k) => ({
      id: `frame:${first[0]}`,
      text: words,
      detail: `${k === 0 ? "Proposed: taken now. " : ""}${plural(frames, "frame")}, the first is ${formatCount(first[0] ?? 0)}.`,
      proposed: k === 0,
    })),
  };
}

/** "Frames 4, 9 and 3 more". */
function firstFrames(first: readonly number[], frames: number): string {
  const named = first.map(formatCount);
  const rest = frames - first.length;
  if (rest > 0) return `Frames ${named.join(", ")} and ${formatCount(rest)} more`;
  return frames === 1 ? `Frame ${named[0]}` : `Frames ${named.slice(0, -1).join(", ")} and ${named.at(-1)}`;
}

const lowerFirst = (text: string) => (/^As /.test(text) ? `a${text.slice(1)}` : text);
