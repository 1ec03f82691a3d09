/**
 * What a file may leave open of how it is to be read (the `ask` rows of the formats beside those of energies): lengths in
 * bohr (X27), decimal commas (X22), a leading index (X26), capitals with two readings (X16), hydrogens without
 * position (S12), another order of atoms (X13), which of several molecules is the ensemble (X12, S21), and which of several
 * configurations of it (S23).
 */
export const ASKS = [
  "lengths",
  "decimal-comma",
  "index-column",
  "capitals",
  "hydrogens",
  "order",
  "group",
  "configuration",
] as const;
export type Ask = (typeof ASKS)[number];

/** What is asked of the ensemble as a whole: no frame waits for it, and others than those taken stay held. */
export type EnsembleAsk = "group" | "configuration";
/** What is asked of single frames, which wait for it. */
export type FrameAsk = Exclude<Ask, EnsembleAsk>;

export function isEnsembleAsk(ask: Ask | undefined): ask is EnsembleAsk {
  return ask === "group" || ask === "configuration";
}

/** Reads what is open as proposed, and marks the frames that hang on it. */
export const AS_PROPOSED = "ask";
/** Holds the frames that hang on it. */
export const HOLD = "hold";

/**
 * For each of these `AS_PROPOSED` or the option that was chosen; what is left out is held. Options: lengths `bohr`,
 * `angstrom`; decimal-comma `comma`; index-column `index`; capitals `label`, `element`; hydrogens `heavy`; order `map`;
 * group and configuration `frame:N`, a frame of it. `hold` is one of each but these two.
 */
export type ReadingChoices = Partial<Record<Ask, string>>;

/** One thing that a frame leaves open, read as proposed. */
export interface OpenReading {
  readonly ask: FrameAsk;
  /** How it was read. */
  readonly proposed: string;
  readonly line: number;
  /** What each option makes of this frame, in a few characters. */
  readonly shown: Readonly<Record<string, string>>;
  /** Only the energy of the frame hangs on it; left out where its atoms do. */
  readonly of?: "energy";
}

/** Row of the acceptance tables. */
export const ASK_CODES: Readonly<Record<Ask, string>> = {
  lengths: "X27",
  "decimal-comma": "X22",
  "index-column": "X26",
  capitals: "X16",
  hydrogens: "S12",
  order: "X13",
  group: "X12",
  configuration: "S23",
};

/** The frame that an answer names; null where none was given. */
export function chosenFrame(choice: string | undefined): number | null {
  const found = /^frame:(\d+)$/.exec(choice ?? "");
  return found ? Number(found[1]) : null;
}

/** Choices where nothing was answered yet: everything is read as proposed. */
export function withProposals(answered: ReadingChoices): ReadingChoices {
  return { ...Object.fromEntries(ASKS.map((ask) => [ask, AS_PROPOSED])), ...answered };
}

/**
 * A comment line of a file whose numbers have decimal commas, with points: `E = -1,5 kcal/mol` becomes `E = -1.5
 * kcal/mol`. Commas that separate stay.
 */
export function withDecimalPoints(comment: string): string {
  return comment.replace(
    /(?<=^|[\s=:("])([+-]?\d*),(\d+(?:[eEdD][+-]?\d+)?)(?=$|[\s)";])/g,
    (_, whole: string, decimals: string) => `${whole}.${decimals}`,
  );
}
