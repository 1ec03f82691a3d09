import type { SdfFields } from "../sdf/frame.ts";
import { quoteFound } from "../text/escape.ts";
import type { EnergyUnit } from "../units.ts";
import { type BareDecimal, bareDecimal } from "./bare-decimal.ts";
import { type CommentNumber, type ScannedComment, scanComment } from "./comment-numbers.ts";
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
import { boundUnit, classify, type NumberClass, namesEnergy, saysRelative } from "./energy-words.ts";
import { hasProperties } from "./extended-comment.ts";
import { extractFieldEnergy, scanFields } from "./field-energies.ts";

/** Keys, and positions, beyond these are not followed: no comment line holds so many energies. */
const MAX_TRACKS = 48;

/** Frames whose values are shown when the number is asked for. */
const SHOWN = 3;

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
  /** Units bound to it, and in how many frames; `unitless` counts the frames without. */
  readonly units: ReadonlyMap<EnergyUnit, number>;
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
  readonly unreadable: { readonly key: string; readonly found: string } | null;
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
  #unreadable: { key: string; found: string } | null = null;

  /**
   * @param options.from the caller's answer: only this number is taken, and it must be found
   * @throws DomainError "invalid" on a rule of another form
   */
  constructor(options: { from?: EnergyFrom | null } = {}) {
    this.#from = options.from ?? null;
    if (this.#from !== null) parseFrom(this.#from);
  }

  /**
   * One frame. Leave broken ones out: their comments say nothing about the others.
   *
   * @param fields data fields of an SDF record
   */
  add(frame: { number: number; file: string; line: number }, comment: string, fields?: SdfFields): void {
    const row = this.#rows.length;
    this.#rows.push({ frame: frame.number, file: frame.file, line: frame.line });
    // Most large files write the energy alone: the way through all words is long, and always ends the same.
    const bare = this.#from === null && !fields ? bareDecimal(comment) : null;
    if (bare) {
      trackOf(this.#positions, 1, true)?.putBare(row, bare);
      return;
    }
    if (this.#from !== null) this.#given.set(row, extractGiven(comment, fields, this.#from));
    const scanned = scanComment(comment);
    const extended = scanned.keyed.size > 0 && hasProperties(comment);
    this.#follow(this.#keys, row, scanned, extended);
    for (const number of scanned.numbers) {
      trackOf(this.#positions, number.position, true)?.put(row, number, scanned, extended);
    }
    if (fields) this.#follow(this.#fields, row, scanFields(fields), false);
  }

  #follow(tracks: Map<string, Track>, row: number, scanned: ScannedComment, extended: boolean): void {
    for (const [key, entry] of scanned.keyed) {
      const track = trackOf(tracks, key, entry.number !== null);
      if (entry.number) track?.put(row, entry.number, scanned, extended);
      else if (track) track.values.set(row, { problem: entry.text.slice(0, 200) });
      else if (this.#unreadable === null && namesEnergy(key)) {
        this.#unreadable = { key, found: quoteFound(entry.text) };
      }
    }
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
      if (!owned.has(position)) found.push(make(`number:${position}`, null, track));
    }
    for (const [name, track] of this.#fields) found.push(make(`field:${name}`, name, track));
    const candidates = found.filter((candidate) => candidate.count > 0).sort(byLikelihood);
    if (this.#from !== null) return this.#finishGiven(candidates, include);
    return { ...decide(candidates), unreadable: this.#withoutNumber() };
  }

  #withoutNumber(): EnergyFindings["unreadable"] {
    const key = this.#unreadable?.key ?? "";
    return this.#keys.has(key) || this.#fields.has(key) ? null : this.#unreadable;
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
    if (column.count === 0) throw absentEnergy(from);
    const known = this.#trackOfGiven(from);
    const rule = parseFrom(from);
    const key = rule.kind === "number" ? null : rule.name;
    const chosen = makeCandidate(from, key, known ?? new Track(0), column, include);
    const others = candidates.filter((candidate) => candidate.from !== from);
    return { candidates: [chosen, ...others], verdict: "given", chosen, proposed: chosen, unreadable: null };
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

/** What is gathered of one key or position while the frames pass. */
class Track {
  readonly values = new EnergyValues();
  readonly classes = new Map<NumberClass, number>();
  readonly units = new Map<EnergyUnit, number>();
  readonly first: (string | null)[] = Array.from({ length: SHOWN }, () => null);
  position: number;
  seen = 0;
  unitless = 0;
  relative = 0;
  customary = 0;

  constructor(position: number) {
    this.position = position;
  }

  /** A number that stands alone: what `put` makes of it, without looking. */
  putBare(row: number, number: BareDecimal): void {
    this.values.setNumber(row, number.value, number.decimals);
    this.position = 1;
    this.seen += 1;
    this.classes.set("loose", (this.classes.get("loose") ?? 0) + 1);
    this.unitless += 1;
    if (row < SHOWN) this.first[row] = number.text;
  }

  put(row: number, number: CommentNumber, comment: ScannedComment, extended: boolean): void {
    this.values.set(row, { text: number.text, value: number.value });
    this.position = number.position;
    this.seen += 1;
    const kind = classify(number);
    this.classes.set(kind, (this.classes.get(kind) ?? 0) + 1);
    const unit = boundUnit(number, comment);
    if (unit === null) this.unitless += 1;
    else this.units.set(unit, (this.units.get(unit) ?? 0) + 1);
    if (row < SHOWN) this.first[row] = number.text;
    if (saysRelative(number)) this.relative += 1;
    if (extended && (number.key === "energy" || number.key === "free_energy")) this.customary += 1;
  }
}

function trackOf<Key>(tracks: Map<Key, Track>, key: Key, make: boolean): Track | undefined {
  const known = tracks.get(key);
  if (known || !make || tracks.size >= MAX_TRACKS) return known;
  const track = new Track(0);
  tracks.set(key, track);
  return track;
}

function makeCandidate(
  from: EnergyFrom,
  key: string | null,
  track: Track,
  column: EnergyColumn,
  include: (frame: number) => boolean,
): EnergyCandidate {
  const chosen = column.rows.flatMap((row, k) => (include(row.frame) ? [k] : []));
  const values = chosen.filter((k) => column.present[k] === 1).map((k) => column.values[k]!);
  const wholeNumbers = column.decimals === 0;
  return {
    from,
    key,
    position: track.position,
    class: classOf(track),
    relative: track.relative * 2 > track.seen,
    count: values.length,
    total: chosen.length,
    min: values.length === 0 ? Number.NaN : values.reduce((low, value) => Math.min(low, value)),
    max: values.length === 0 ? Number.NaN : values.reduce((high, value) => Math.max(high, value)),
    first: track.first.slice(0, Math.min(SHOWN, column.rows.length)),
    wholeNumbers,
    countsUp:
      wholeNumbers && values.length > 1 && values.every((v, k) => k === 0 || v === values[k - 1]! + 1),
    units: track.units,
    unitless: track.unitless,
    customary: track.customary * 2 > track.seen,
    column,
  };
}

const RANK: readonly NumberClass[] = ["energy", "unit", "loose", "whole", "other"];

/** The best class that holds in half the frames; whole numbers among decimals ("0" for the lowest) count with them. */
function classOf(track: Track): NumberClass {
  const count = (kind: NumberClass) => track.classes.get(kind) ?? 0;
  for (const kind of ["energy", "unit"] as const)
    if (count(kind) * 2 >= track.seen && count(kind) > 0) return kind;
  if (count("other") * 2 > track.seen) return "other";
  if (count("loose") > 0) return "loose";
  return count("whole") > 0 ? "whole" : "other";
}

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

function decide(candidates: readonly EnergyCandidate[]): Omit<EnergyFindings, "unreadable"> {
  const viable = candidates.filter((candidate) => RANK.indexOf(candidate.class) <= RANK.indexOf("loose"));
  const best = viable[0];
  if (!best) return { candidates, verdict: "none", chosen: null, proposed: null };
  const peers = viable.filter((candidate) => candidate.class === best.class);
  const most = Math.max(...peers.map((peer) => peer.count));
  // A stray number in a few frames is no rival; a name in a few frames is no match for a number that is everywhere.
  const rivals = peers.filter((peer) => peer !== best && peer.count * 2 >= most && !sameValues(peer, best));
  const thin = viable.some((candidate) => candidate.count > 2 * most);
  if (rivals.length > 0 || thin) return { candidates, verdict: "several", chosen: null, proposed: best };
  return { candidates, verdict: "lone", chosen: best, proposed: best };
}

/** Some writers give the same number twice, as `energy` and `free_energy`. */
function sameValues(a: EnergyCandidate, b: EnergyCandidate): boolean {
  const { column: x } = a;
  const { column: y } = b;
  return x.values.every((value, k) => value === y.values[k] && x.present[k] === y.present[k]);
}
