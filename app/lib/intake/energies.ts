import type { SdfFields } from "../sdf/frame.ts";
import type { EnergyUnit } from "../units.ts";
import { bareDecimal } from "./bare-decimal.ts";
import { type ScannedComment, scanComment } from "./comment-numbers.ts";
import {
  absentEnergy,
  type EnergyColumn,
  type EnergyFrom,
  type EnergyRow,
  EnergyValues,
  type ExtractedEnergy,
  extractEnergy,
  parseFrom,
} from "./energy-column.ts";
import { makeCandidate, Track } from "./energy-track.ts";
import { type NumberClass, namesEnergy } from "./energy-words.ts";
import { hasProperties } from "./extended-comment.ts";
import { extractFieldEnergy, scanFields } from "./field-energies.ts";
import { type TextKey, TextKeys } from "./text-keys.ts";

/** Positions beyond these are not followed, nor keys that name an energy: no comment line holds so many. */
const MAX_TRACKS = 48;
/** Quantities that a file's comments and fields may bring, where nothing else is said. */
export const DEFAULT_MAX_COLUMNS = 200;
/** Names of keys beyond that are kept for the message; the rest is counted. */
const NAMED_BEYOND = 5_000;

/** One number that runs through the frames. */
export interface EnergyCandidate {
  readonly from: EnergyFrom;
  /** The key, or null for a number that is only counted. */
  readonly key: string | null;
  /** Its place among the numbers of the comment line in the frame seen last. */
  readonly position: number;
  /** By the words round it in most frames. */
  readonly class: NumberClass;
  /** Words say that it is a difference. */
  readonly relative: boolean;
  /** Frames that have it, out of `total` that take part. */
  readonly count: number;
  readonly total: number;
  /** NaN where no frame has it. */
  readonly min: number;
  readonly max: number;
  /** As written in the first three frames; null where it is missing. */
  readonly first: readonly (string | null)[];
  readonly wholeNumbers: boolean;
  /** One more in every frame. */
  readonly countsUp: boolean;
  /** Units bound to it, with the indices of their rows; `unitless` counts the values without. */
  readonly unitRows: ReadonlyMap<EnergyUnit, readonly number[]>;
  readonly unitless: number;
  /** A bare key `energy` or `free_energy` of extended comments, in most frames (row E05). */
  readonly customary: boolean;
  /** Its values over all frames added. */
  readonly column: EnergyColumn;
}

export interface EnergyFindings {
  /** Every number worth showing, the likeliest first. */
  readonly candidates: readonly EnergyCandidate[];
  /**
   * "given": the caller said which; "lone": one number can be the energy, and it is taken; "several": ask; "none": the
   * comments hold no energy.
   */
  readonly verdict: "given" | "lone" | "several" | "none";
  /** The given or lone one. */
  readonly chosen: EnergyCandidate | null;
  /** What to propose where several could be; the chosen one otherwise. */
  readonly proposed: EnergyCandidate | null;
  /** A key that names an energy but holds no number in any frame, such as `E = -76,02`; null where there is none. */
  readonly unreadable: TextKey | null;
  /** Keys whose value is text, a logical or several numbers, in the frames named. */
  readonly texts: readonly TextKey[];
  /** Keys beyond the limit of columns, in order of appearance, and how many there are. */
  readonly beyond: { readonly names: readonly string[]; readonly count: number };
  /** Where each frame stands, by row index. */
  readonly rows: readonly EnergyRow[];
}

/**
 * Looks through the comment lines and data fields of an upload, frame by frame, for the numbers that can be the energy
 * (rows E01 to E09, S20).
 *
 * A number that is named as an energy counts more than one with only a unit of energy, and that more than one with
 * neither; what names another quantity, counts, or is a whole number is none. A single candidate of the best kind
 * found is taken; several are asked. Two that agree in every frame are one.
 *
 * @example
 * const scan = new EnergyScan();
 * for await (const frame of readXyz(source, options)) if (!frame.problem) scan.add(frame, frame.comment);
 * scan.finish().verdict // "lone"
 */
export class EnergyScan {
  readonly #from: EnergyFrom | null;
  readonly #given = new EnergyValues();
  readonly #keys = new Map<string, Track>();
  readonly #positions = new Map<number, Track>();
  /** By the name of their data field. */
  readonly #fields = new Map<string, Track>();
  readonly #rows: EnergyRow[] = [];
  readonly #texts = new TextKeys();
  readonly #beyond = new Set<string>();
  #beyondCount = 0;
  /** Keys that are followed: those that name an energy have room of their own, wherever they stand. */
  #energyKeys = 0;
  #otherKeys = 0;
  readonly #maxColumns: number;

  /**
   * @param options.from the caller's answer: only this number is taken, and it must be found
   * @param options.maxColumns keys and fields that are followed; the rest is named in `beyond`
   * @throws DomainError "invalid" on a rule of another form
   */
  constructor(options: { from?: EnergyFrom | null; maxColumns?: number } = {}) {
    this.#from = options.from ?? null;
    this.#maxColumns = options.maxColumns ?? DEFAULT_MAX_COLUMNS;
    if (this.#from !== null) parseFrom(this.#from);
  }

  /**
   * One frame. Leave broken ones out: their comments say nothing about the others.
   *
   * @param fields data fields of an SDF record
   */
  add(frame: { number: number; file: string; line: number }, comment: string, fields?: SdfFields): void {
    const row = this.#rows.length;
    const { number, file, line } = frame;
    this.#rows.push({ frame: number, file, line, ...(fields ? { textLine: line } : {}) });
    // Most large files write the energy alone: the way through all words is long, and always ends the same.
    const bare = this.#from === null && !fields ? bareDecimal(comment) : null;
    if (bare) {
      this.#trackAt(1)?.putBare(row, bare);
      return;
    }
    if (this.#from !== null) this.#given.set(row, extractGiven(comment, fields, this.#from));
    const scanned = scanComment(comment);
    const extended = scanned.keyed.size > 0 && hasProperties(comment);
    this.#follow(this.#keys, row, scanned, extended);
    for (const number of scanned.numbers) {
      this.#trackAt(number.position)?.put(row, number, scanned, extended);
    }
    if (fields) this.#follow(this.#fields, row, scanFields(fields), false);
  }

  #follow(tracks: Map<string, Track>, row: number, scanned: ScannedComment, extended: boolean): void {
    for (const [key, entry] of scanned.keyed) {
      const known = tracks.get(key);
      if (entry.number) (known ?? this.#trackOf(tracks, key))?.put(row, entry.number, scanned, extended);
      else if (known) known.putText(row, entry.text);
      else this.#texts.put(key, row, entry.text);
    }
  }

  #trackAt(position: number): Track | null {
    const known = this.#positions.get(position);
    if (known || this.#positions.size >= MAX_TRACKS) return known ?? null;
    const track = new Track(position);
    this.#positions.set(position, track);
    return track;
  }

  /** A new track, which begins with the texts that stood there before; null for a key too many. */
  #trackOf(tracks: Map<string, Track>, key: string): Track | null {
    const energy = namesEnergy(key);
    if (energy ? this.#energyKeys >= MAX_TRACKS : this.#otherKeys >= this.#maxColumns) {
      if (!this.#beyond.has(key)) {
        this.#beyondCount += 1;
        if (this.#beyond.size < NAMED_BEYOND) this.#beyond.add(key);
      }
      return null;
    }
    if (energy) this.#energyKeys += 1;
    else this.#otherKeys += 1;
    const track = new Track(0);
    for (const [row, text] of this.#texts.get(key)?.rows ?? []) track.putText(row, text);
    tracks.set(key, track);
    return track;
  }

  /**
   * What was found. `include` leaves frames out of the counts and spreads (held ones, by their number); the columns
   * hold them all the same.
   *
   * @throws DomainError "invalid" where the given number stands in no frame
   */
  finish(include: (frame: number) => boolean = () => true): EnergyFindings {
    const rows = this.#rows;
    const make = (from: EnergyFrom, key: string | null, track: Track) =>
      makeCandidate(from, key, track, track.values.finish(from, rows), include);
    const keys = [...this.#keys].filter(([, track]) => !this.#isPassing(track));
    const owned = new Set(keys.filter(([, track]) => this.#owns(track)).map(([, track]) => track.position));
    const found = keys.map(([key, track]) => make(`key:${key}`, key, track));
    for (const [position, track] of this.#positions) {
      // Numbers of a key that stands twice are followed by the key: its last one counts, the others are no choice.
      if (!owned.has(position) && track.repeated * 2 <= track.seen)
        found.push(make(`number:${position}`, null, track));
    }
    for (const [name, track] of this.#fields) found.push(make(`field:${name}`, name, track));
    const candidates = found.filter((candidate) => candidate.count > 0).sort(byLikelihood);
    if (this.#from !== null) return this.#finishGiven(candidates, include);
    const told = this.#told();
    return { ...decide(candidates, told.unreadable), ...told };
  }

  /** What is said beside the candidates. */
  #told(): Pick<EnergyFindings, "unreadable" | "texts" | "beyond" | "rows"> {
    const texts = this.#texts.all().filter(({ key }) => !this.#keys.has(key) && !this.#fields.has(key));
    const unreadable = texts.find(({ key }) => namesEnergy(key)) ?? null;
    const beyond = { names: [...this.#beyond], count: this.#beyondCount };
    return { unreadable, texts, beyond, rows: this.#rows };
  }

  /** A name that changes from frame to frame, such as the label in `conf_0007: -12.3`. */
  #isPassing(track: Track): boolean {
    return track.seen * 10 < (this.#positions.get(track.position)?.seen ?? 0);
  }

  /** The key names the number at its position in most frames, so that the position itself need not be shown. */
  #owns(track: Track): boolean {
    return track.seen * 2 >= (this.#positions.get(track.position)?.seen ?? 0);
  }

  #finishGiven(candidates: readonly EnergyCandidate[], include: (frame: number) => boolean): EnergyFindings {
    const from = this.#from ?? "";
    const column = this.#given.finish(from, this.#rows);
    if (column.count === 0) throw absentEnergy(column);
    const known = this.#trackOfGiven(from);
    const rule = parseFrom(from);
    const key = rule.kind === "number" ? null : rule.name;
    const chosen = makeCandidate(from, key, known ?? new Track(0), column, include);
    const others = candidates.filter((candidate) => candidate.from !== from);
    const told = { ...this.#told(), unreadable: null };
    return { candidates: [chosen, ...others], verdict: "given", chosen, proposed: chosen, ...told };
  }

  #trackOfGiven(from: EnergyFrom): Track | undefined {
    const rule = parseFrom(from);
    if (rule.kind === "number") return this.#positions.get(rule.position);
    return (rule.kind === "key" ? this.#keys : this.#fields).get(rule.name);
  }
}

function extractGiven(comment: string, fields: SdfFields | undefined, from: EnergyFrom): ExtractedEnergy {
  const rule = parseFrom(from);
  if (rule.kind !== "field") return extractEnergy(comment, from);
  return fields ? extractFieldEnergy(fields, rule.name) : null;
}

const RANK: readonly NumberClass[] = ["energy", "unit", "loose", "whole", "other"];

/** Class, then plain names before others, then presence, then place in the line. */
function byLikelihood(a: EnergyCandidate, b: EnergyCandidate): number {
  return (
    RANK.indexOf(a.class) - RANK.indexOf(b.class) ||
    Number(b.key?.toLowerCase() === "energy") - Number(a.key?.toLowerCase() === "energy") ||
    Number(a.relative) - Number(b.relative) ||
    b.count - a.count ||
    a.position - b.position
  );
}

type Decided = Pick<EnergyFindings, "candidates" | "verdict" | "chosen" | "proposed">;

function decide(candidates: readonly EnergyCandidate[], unreadable: TextKey | null): Decided {
  const viable = candidates.filter((candidate) => RANK.indexOf(candidate.class) <= RANK.indexOf("loose"));
  const best = viable[0];
  if (!best) return { candidates, verdict: "none", chosen: null, proposed: null };
  const peers = viable.filter((candidate) => candidate.class === best.class);
  const most = Math.max(...peers.map((peer) => peer.count));
  // A stray number in a few frames is no rival; a name in a few frames is no match for a number that is everywhere.
  const rivals = peers.filter((peer) => peer !== best && peer.count * 2 >= most && !sameValues(peer, best));
  const thin = viable.some((candidate) => candidate.count > 2 * most);
  // "E = -76,02 x = 1.5": what is named as the energy cannot be read, and the next best is no stand-in.
  const standIn = unreadable !== null && best.class !== "energy";
  if (standIn) return { candidates, verdict: "several", chosen: null, proposed: null };
  if (rivals.length > 0 || thin) return { candidates, verdict: "several", chosen: null, proposed: best };
  return { candidates, verdict: "lone", chosen: best, proposed: best };
}

/** Some writers give the same number twice, as `energy` and `free_energy`. */
function sameValues(a: EnergyCandidate, b: EnergyCandidate): boolean {
  const { column: x } = a;
  const { column: y } = b;
  return x.values.every((value, k) => value === y.values[k] && x.present[k] === y.present[k]);
}
