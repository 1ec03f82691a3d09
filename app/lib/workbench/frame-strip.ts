/** Above this many frames one tick stands for several. */
const MAX_TICKS = 1000;
const BIN_SIZES = [2, 5, 10, 20, 50, 100];

export interface StripTick {
  /** Frame numbers that the tick stands for. */
  first: number;
  last: number;
  /** The most serious state among them. */
  state: "accepted" | "remarked" | "waiting" | "held";
  remarked: number;
  waiting: number;
  held: number;
}

export interface FrameStrip {
  /** Frames a tick stands for; the last one may stand for fewer. */
  perTick: number;
  ticks: StripTick[];
}

/**
 * The frames in file order as ticks: one a frame up to 1,000 frames, else one a bin of a round size.
 *
 * @param states one character a frame: a accepted, r remarked, h held, w waits for an answer
 * @example frameStrip("aarh").ticks.map((tick) => tick.state) // accepted, accepted, remarked, held
 */
export function frameStrip(states: string): FrameStrip {
  const least = Math.ceil(states.length / MAX_TICKS);
  const perTick = least <= 1 ? 1 : (BIN_SIZES.find((size) => size >= least) ?? least);
  const ticks: StripTick[] = [];
  for (let start = 0; start < states.length; start += perTick) {
    const end = Math.min(start + perTick, states.length);
    let remarked = 0;
    let waiting = 0;
    let held = 0;
    for (let k = start; k < end; k++) {
      if (states[k] === "r") remarked += 1;
      else if (states[k] === "h") held += 1;
      else if (states[k] === "w") waiting += 1;
    }
    const state = held > 0 ? "held" : remarked > 0 ? "remarked" : waiting > 0 ? "waiting" : "accepted";
    ticks.push({ first: start + 1, last: end, state, remarked, waiting, held });
  }
  return { perTick, ticks };
}
