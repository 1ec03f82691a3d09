import { IntakeRejection } from "../intake/reject.ts";
import { quoteFound } from "../text/escape.ts";
import { looksLikeAtom } from "./atom-line.ts";
import { MAX_COLUMNS, PLAIN_LAYOUT } from "./layout.ts";

/** Why an XYZ file is refused as a whole: rows G06, G11 and X03. Each throws. */

export interface Place {
  readonly file: string;
  readonly line: number;
  readonly frame: number;
}

const thousands = (value: number) => value.toLocaleString("en-GB");

export function refuseFrames(place: Place, limit: number): never {
  throw new IntakeRejection({
    code: "G11",
    ...place,
    message: `The limit is ${thousands(limit)} frames, and frame ${thousands(place.frame)} begins here.`,
    hint: "Split the file, or narrow the energy window before the upload.",
  });
}

export function refuseAtoms(place: Place, limit: number, announced: string): never {
  throw new IntakeRejection({
    code: "G11",
    ...place,
    found: quoteFound(announced),
    message: `The limit is ${thousands(limit)} atoms a frame, and this frame announces more.`,
    hint: "Take solvent or surroundings out before the upload.",
  });
}

export function refuseColumns(place: Place, columns: number): never {
  throw new IntakeRejection({
    code: "G11",
    ...place,
    found: String(columns),
    message: `The limit is ${thousands(MAX_COLUMNS)} columns a line, and this file has more.`,
    hint: "Leave out what is not needed, or bring it as a table.",
  });
}

export function refuseFirstLine(file: string, line: number, text: string): never {
  throw new IntakeRejection({
    code: "X03",
    file,
    line,
    found: quoteFound(text.trim()),
    message: `Line ${line} should hold the atom count.`,
    hint: looksLikeAtom(text, PLAIN_LAYOUT)
      ? "These look like atoms without a header: put a line with their count and a comment line before them."
      : "XYZ begins with a line that holds the number of atoms and nothing else. If this is the output of a program, export its structures as XYZ or SDF.",
  });
}

export function refuseEmpty(file: string): never {
  throw new IntakeRejection({
    code: "G06",
    file,
    message: "The file has no frames.",
    hint: "XYZ begins with a line that holds the number of atoms.",
  });
}
