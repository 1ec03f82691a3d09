import { formatCount, plural } from "../format.ts";
import type { IntakeMessage } from "../intake/report.ts";
import type { FrameMatches } from "./match-frames.ts";

export interface MatchFacts {
  file: string;
  /** Numbers of the rows in the ensemble and in the file. */
  ownNumbers: Int32Array;
  otherNumbers: Int32Array;
  /** Count line of each row of the file. */
  lines: readonly number[];
  /** Rows of the ensemble that are accepted; others need no partner. */
  accepted(frame: number): boolean;
  /** Å. */
  tolerance: number;
}

const angstrom = (value: number) => `${value.toFixed(3)} Å`;

/** How the frames were matched, in one line. */
export function matchSummary(matches: FrameMatches, facts: MatchFacts): string {
  let equal = 0;
  let moved = 0;
  let mirrored = 0;
  let farthest = 0;
  matches.how.forEach((how, row) => {
    if (how === 1) equal += 1;
    else if (how === 2) moved += 1;
    else if (how === 3) mirrored += 1;
    farthest = Math.max(farthest, matches.rmsd[row]!);
  });
  const total = equal + moved + mirrored;
  const parts = [
    `${formatCount(total)} of ${plural(facts.otherNumbers.length, "frame")} of the file matched`,
  ];
  if (equal > 0) parts.push(`${formatCount(equal)} by equal coordinates`);
  if (moved > 0) parts.push(`${formatCount(moved)} by structure, the farthest ${angstrom(farthest)} away`);
  if (mirrored > 0) parts.push(`${formatCount(mirrored)} by their mirror image`);
  return parts.join(", ");
}

/**
 * What was not matched one to one, each frame by name (row E14): frames of the ensemble without a partner, two frames that
 * became one, frames of the file that belong to none.
 */
export function matchMessages(matches: FrameMatches, facts: MatchFacts): IntakeMessage[] {
  const { file, ownNumbers, otherNumbers, lines } = facts;
  const ownerOf = new Map<number, number>();
  matches.partner.forEach((other, row) => {
    if (other >= 0) ownerOf.set(other, row);
  });
  const remark = (rest: Omit<IntakeMessage, "code" | "severity" | "file">): IntakeMessage => ({
    code: "E14",
    severity: "remark",
    file,
    ...rest,
  });
  const messages: IntakeMessage[] = [];
  const shared = new Set(matches.shared.map(({ row }) => row));
  for (const { row, nearest, rmsd } of matches.shared) {
    const owner = ownerOf.get(nearest);
    const whose = owner === undefined ? "" : `, which is matched with frame ${ownNumbers[owner]}`;
    messages.push(
      remark({
        frame: ownNumbers[row]!,
        line: lines[nearest],
        message: `Two to one: it lies ${angstrom(rmsd)} from frame ${otherNumbers[nearest]} of ${file}${whose}; it gets no value.`,
        hint: "Did two minima become one at this level?",
      }),
    );
  }
  for (const { row, nearest, rmsd } of matches.sharedOther) {
    messages.push(
      remark({
        frame: ownNumbers[nearest]!,
        line: lines[row],
        message: `Frame ${otherNumbers[row]} of ${file} lies ${angstrom(rmsd)} from it too, and was not taken.`,
      }),
    );
  }
  const alone = [...ownNumbers].filter(
    (frame, row) => matches.partner[row] === -1 && !shared.has(row) && facts.accepted(frame),
  );
  for (const frame of alone) {
    messages.push(
      remark({
        frame,
        message: `No frame of ${file} lies within ${facts.tolerance} Å of it; its value is missing.`,
      }),
    );
  }
  const listed = new Set(matches.sharedOther.map(({ row }) => row));
  otherNumbers.forEach((number, row) => {
    if (ownerOf.has(row) || listed.has(row)) return;
    messages.push(
      remark({ line: lines[row], message: `Frame ${number} of ${file} matches no frame of the ensemble.` }),
    );
  });
  if (!matches.complete) {
    const message =
      "So many frames are alike that not all pairs were compared; frames may have a partner that is not named.";
    messages.push(remark({ message, hint: "Match by number or label, or send a table." }));
  }
  return messages;
}
