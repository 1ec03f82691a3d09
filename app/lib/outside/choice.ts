import type { AtomSet } from "../structure.ts";

export const OUTSIDE_SETS: readonly AtomSet[] = ["heavy", "heavy+polarH", "all"];

/** Å within which a conformer counts as near, where nobody says otherwise. */
const NEAR = 0.5;

/** What is compared with a structure from outside, as the address has it beside the rest. */
export interface OutsideChoice {
  /** Id of the structure; null: the newest. */
  outside: string | null;
  set: AtomSet;
  /** False leaves mirror images out, whatever the molecule is. */
  mirror: boolean;
  /** Å */
  near: number;
  /** Frame that is laid over; null: the nearest. */
  over: number | null;
}

/**
 * Reads the choice from an address; what is not understood is as if it were not there.
 *
 * @example readOutsideChoice(new URLSearchParams("set=all&near=0.8")).near // 0.8
 */
export function readOutsideChoice(params: URLSearchParams): OutsideChoice {
  const near = Number(params.get("near"));
  const over = Number(params.get("over"));
  return {
    outside: params.get("outside"),
    set: OUTSIDE_SETS.find((one) => one === params.get("set")) ?? "heavy",
    mirror: params.get("hand") !== "same",
    near: near > 0 && near <= 100 ? near : NEAR,
    over: Number.isInteger(over) && over > 0 ? over : null,
  };
}

/** Writes the choice into an address, defaults left out; the other parameters stay. */
export function writeOutsideChoice(choice: OutsideChoice, params: URLSearchParams): URLSearchParams {
  const next = new URLSearchParams(params);
  const write = (key: string, value: string | null) =>
    value === null ? next.delete(key) : next.set(key, value);
  write("outside", choice.outside);
  write("set", choice.set === "heavy" ? null : choice.set);
  write("hand", choice.mirror ? null : "same");
  write("near", choice.near === NEAR ? null : String(choice.near));
  write("over", choice.over === null ? null : String(choice.over));
  return next;
}
