import { readCountLine } from "./count-line.ts";
import type { BuilderFault, FrameBuilder, TextLine } from "./frame-builder.ts";

/** Faults of a frame's form, which end it before or behind its count: rows X08, X09 and X10. */

/** Blank line, text or the next count inside of the atoms. */
export function brokenOff(builder: FrameBuilder, line: TextLine, number: number): BuilderFault {
  const text = line.text.trim();
  const then = readCountLine(line.text, false) ? "the next count" : text === "" ? "a blank line" : "text";
  const comment = builder.commentLikeAtom
    ? ` Line ${builder.line + 1} looks like an atom: is the comment line missing?`
    : "";
  return {
    code: "X08",
    reason: "unreadable",
    line: line.number,
    message: `Frame ${number} has ${builder.read} of its ${builder.count} atoms; then comes ${then}.`,
    hint: `Correct the frame in the file, or leave it held.${comment}`,
    ...(text === "" ? {} : { found: text }),
  };
}

/** More atom lines than the count; `line` is the first of them. */
export function surplus(builder: FrameBuilder, line: number, number: number): BuilderFault {
  return {
    code: "X10",
    reason: "unreadable",
    line,
    message: `Frame ${number} has more atom lines than its count of ${builder.count}.`,
    hint: "Correct the count in the file, or leave the frame held.",
  };
}

/**
 * The file ends inside of the frame; null where the frame had nothing to lose (row X04 says so).
 *
 * @param cutLine the last line, where the file ends in the middle of it: it counts as no atom
 */
export function cutOff(builder: FrameBuilder, number: number, cutLine: TextLine | null): BuilderFault | null {
  if (builder.count === 0) return null;
  const counted = cutLine !== null && builder.fault?.line === cutLine.number;
  const whole = builder.read - Number(counted);
  const end = cutLine === null ? "the file ends" : "the file ends in the middle of a line";
  return {
    code: "X09",
    reason: "unreadable",
    line: cutLine?.number ?? builder.line,
    message: `Frame ${number} has ${whole} of its ${builder.count} atoms; then ${end}.`,
    hint: "The file was cut: copy it again, or leave the frame held.",
    ...(cutLine === null ? {} : { found: cutLine.text.trim() }),
  };
}
