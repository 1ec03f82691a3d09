import { capital, formatCount, formatRmsd, withUnit } from "../format.ts";
import type { ViewMode } from "../url-state.ts";
import { byPopulation, type ConformerRow, type FrameRole } from "./conformers.ts";
import type { Distance } from "./distances.ts";
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
      caption: laidOverCaption(frames, { roles, held, mode }),
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

/**
 * What is laid over what, in which hand and how near; frames that are shown by themselves otherwise.
 *
 * @param frames as drawn; the first is what the others are laid over
 * @param around.apart distances to the first by frame, as far as they are known. Of a repeat the sift itself says it.
 */
export function laidOverCaption(
  frames: readonly number[],
  around: {
    roles: ReadonlyMap<number, FrameRole>;
    held: ReadonlySet<number>;
    mode: ViewMode;
    apart?: ReadonlyMap<number, Distance>;
  },
): { strong: string; rest: string } {
  const { roles, held, mode } = around;
  const name = (frame: number) => frameName(frame, roles, held);
  const [first, second, ...more] = frames;
  if (first === undefined) return { strong: "Nothing chosen", rest: "select a conformer in the table" };
  // A conformer keeps its name: C1 is an atom.
  const upper = (text: string) => (text.startsWith("frame ") ? capital(text) : text);
  if (second === undefined) {
    const role = roles.get(first);
    if (held.has(first)) return { strong: upper(name(first)), rest: "held" };
    return { strong: upper(name(first)), rest: role?.kind === "repeat" ? `repeats ${role.name}` : "" };
  }
  const words = (frame: number) => {
    if (held.has(frame)) return "held";
    const role = roles.get(frame);
    if (role?.kind === "repeat" && role.repeats === first)
      return apartWords({ rmsd: role.rmsd, mirror: role.mirror, exact: !role.upperBound });
    const apart = around.apart?.get(frame);
    return apart === undefined || held.has(first) ? null : apartWords(apart);
  };
  const how = mode === "side" ? "beside" : "laid over";
  if (more.length > 0) {
    const others = [second, ...more].map((frame) => [name(frame), words(frame)] as const);
    return {
      strong: upper(name(first)),
      rest: `with ${joinWords(others.map(([text, apart]) => (apart === null ? text : `${text} (${apart})`)))} ${how}${mode === "side" ? "" : " it"}`,
    };
  }
  const apart = words(second);
  return {
    strong: upper(name(second)),
    rest: `${how} ${name(first)}${apart === null ? "" : `: ${apart}`}`,
  };
}

/** "mirror image, RMSD 0.365 Å": a reflection is never shown without its name. */
function apartWords({ rmsd, mirror, exact }: Distance): string {
  return `${mirror ? "mirror image" : "same hand"}, RMSD ${exact ? "" : "at most "}${withUnit(formatRmsd(rmsd), "Å")}`;
}
