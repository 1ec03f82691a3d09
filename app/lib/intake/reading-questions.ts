import { formatCount, plural } from "../format.ts";
import { ASK_CODES, type Ask, HOLD, type OpenReading } from "./reading-choices.ts";
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

const WORDS: Record<Exclude<Ask, "group">, Words> = {
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
  ask: Exclude<Ask, "group">,
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
export function waitingMessage(ask: Ask): Pick<IntakeMessage, "code" | "severity" | "message" | "hint"> {
  const text = ask === "group" ? GROUP_TEXT : WORDS[ask].text;
  return {
    code: ASK_CODES[ask],
    severity: "question",
    message: `The frame waits for an answer: ${text}`,
    hint: "It takes no part until that is answered, or somebody releases it.",
  };
}

/** What is said of a frame that an answer holds. */
export function heldMessage(ask: Ask): Pick<IntakeMessage, "code" | "severity" | "message" | "hint"> {
  const text = ask === "group" ? GROUP_TEXT : WORDS[ask].text;
  return {
    code: ASK_CODES[ask],
    severity: "hold",
    message: `The answer was to keep such frames held: ${text}`,
    hint: "Write the file so that it does not leave this open, and take it in again.",
  };
}

const GROUP_TEXT = "Which molecule is the ensemble?";

const charged = (charge: number | null) =>
  charge === null || charge === 0 ? "" : `, charge ${charge > 0 ? "+" : "−"}${Math.abs(charge)}`;

/** "Which molecule is the ensemble?" (rows X12, S21). */
export function groupQuestion(molecules: readonly MoleculeChoice[], inSdf: boolean): IntakeQuestion {
  return {
    id: "group",
    code: inSdf ? "S21" : "X12",
    text: GROUP_TEXT,
    reason:
      "The files hold several. The one with most frames was taken; the others are held until you choose.",
    options: molecules.map(({ frame, frames, formula, charge, difference, proposed }) => ({
      id: `frame:${frame}`,
      text: `${formula}${charged(charge)}${difference === null ? "" : ` (${difference})`}`,
      detail: `${proposed ? "Proposed: taken now. " : ""}${plural(frames, "frame")}, the first is ${formatCount(frame)}.`,
      proposed,
    })),
  };
}
