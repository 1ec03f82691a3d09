import { capital, formatCount, formatRmsd, plural, withUnit } from "../format.ts";
import type { ViewMode } from "../url-state.ts";
import { byPopulation, type ConformerRow, type FrameRole } from "./conformers.ts";
import { joinWords } from "./findings.ts";

/** More overlaid lines than this say nothing new and slow the view. */
export const MAX_OVERLAID = 300;
/** In atom colours at once; design page, section 8. */
export const MAX_COLOURED = 4;

export interface ShownFrame {
  frame: number;
  population: number | null;
  selected: boolean;
  held: boolean;
  /** Laid over the first one as the sift compared it: atoms exchanged, reflected where nearer. */
  laidOver: boolean;
}

export interface ViewPlan {
  frames: ShownFrame[];
  caption: { strong: string; rest: string };
  /** Conformers that are not drawn, of the most populated up. */
  notDrawn: number;
}

/**
 * Which frames the view shows, and what it says of them.
 *
 * Kept conformers are overlaid, the selected ones in atom colours among all others; a frame that is not kept (a
 * repeat, a held frame) is shown with what else is selected and nothing around it.
 *
 * @param selected frame numbers in the order chosen; the first is what others are laid over
 */
export function viewPlan(options: {
  rows: readonly ConformerRow[];
  roles: ReadonlyMap<number, FrameRole>;
  /** Frames held now, which need not be those held when the sift ran. */
  held: ReadonlySet<number>;
  selected: readonly number[];
  mode: ViewMode;
  alignedOn: string;
  /** The two selected were asked for as a pair: they are shown alone, one laid over the other. */
  pair?: boolean;
}): ViewPlan {
  const { rows, roles, held, selected, mode } = options;
  const byFrame = new Map(rows.map((row) => [row.frame, row]));
  const population = (frame: number) => byFrame.get(frame)?.population ?? null;
  const shown = (frame: number, laidOver: boolean): ShownFrame => ({
    frame,
    population: population(frame),
    selected: true,
    held: held.has(frame),
    laidOver,
  });
  const name = (frame: number) => frameName(frame, roles, held);
  const stranger = selected.some((frame) => !byFrame.has(frame));

  if (stranger || rows.length === 0 || (options.pair && mode === "overlay")) {
    const frames = selected.slice(0, mode === "one" ? 1 : MAX_COLOURED);
    return {
      frames: frames.map((frame, k) => shown(frame, k > 0 && roles.has(frame))),
      caption: strangerCaption(frames, roles, name, held),
      notDrawn: 0,
    };
  }
  if (mode !== "overlay") {
    const frames = (selected.length > 0 ? selected : rows.slice(0, 1).map((row) => row.frame)).slice(
      0,
      mode === "one" ? 1 : MAX_COLOURED,
    );
    return {
      frames: frames.map((frame) => shown(frame, false)),
      caption: {
        strong: joinWords(frames.map(name)),
        rest: mode === "side" && frames.length > 1 ? `side by side, ${options.alignedOn}` : "",
      },
      notDrawn: 0,
    };
  }
  const coloured = new Set(selected);
  const others = byPopulation(rows)
    .filter((row) => !coloured.has(row.frame))
    .slice(0, Math.max(0, MAX_OVERLAID - coloured.size));
  return {
    frames: [
      ...selected.map((frame) => shown(frame, false)),
      ...others.map((row) => ({
        frame: row.frame,
        population: row.population,
        selected: false,
        held: held.has(row.frame),
        laidOver: false,
      })),
    ],
    caption: {
      strong: "Overlay",
      rest: `of ${others.length + coloured.size === rows.length ? formatCount(rows.length) : `the ${formatCount(others.length + coloured.size)} most populated of ${formatCount(rows.length)}`}, ${options.alignedOn}`,
    },
    notDrawn: rows.length - others.length - coloured.size,
  };
}

/** "c1", "frame 30". */
export function frameName(
  frame: number,
  roles: ReadonlyMap<number, FrameRole>,
  held: ReadonlySet<number> = new Set(),
): string {
  const role = roles.get(frame);
  return role?.kind === "kept" && !held.has(frame) ? role.name : `frame ${frame}`;
}

function strangerCaption(
  frames: readonly number[],
  roles: ReadonlyMap<number, FrameRole>,
  name: (frame: number) => string,
  held: ReadonlySet<number>,
): { strong: string; rest: string } {
  const [first, second] = frames;
  if (first === undefined) return { strong: "Nothing chosen", rest: "select a conformer in the table" };
  // A conformer keeps its name: C1 is an atom.
  const upper = (text: string) => (text.startsWith("frame ") ? capital(text) : text);
  if (second === undefined) {
    const role = roles.get(first);
    if (held.has(first)) return { strong: upper(name(first)), rest: "held" };
    return { strong: upper(name(first)), rest: role?.kind === "repeat" ? `repeats ${role.name}` : "" };
  }
  const role = roles.get(second);
  if (frames.length > 2)
    return {
      strong: joinWords(frames.map(name)),
      rest: `${plural(frames.length, "frame")} laid over each other`,
    };
  if (role?.kind !== "repeat" || role.repeats !== first) {
    return { strong: name(first), rest: `with ${name(second)} laid over it` };
  }
  return {
    strong: name(first),
    rest: `with ${name(second)} laid over it; ${role.mirror ? "mirror image, " : ""}RMSD ${withUnit(formatRmsd(role.rmsd), "Å")}`,
  };
}
