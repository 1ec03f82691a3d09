/**
 * Every number and date that a person sees. One fixed locale and UTC, so that server and browser write the same
 * characters: minus is U+2212, thousands stand apart by a comma, a space stands before a unit and before %.
 * What is copied or exported is the raw value, never these strings.
 */

export const MINUS = "\u2212";
/** Stands where a value is absent: never 0, never an empty cell. */
export const ABSENT = "\u2013";
/** Keeps a figure and its unit on one line. */
const NBSP = "\u00a0";

type Maybe = number | null | undefined;

/**
 * A number with fixed decimals, U+2212 and grouped thousands.
 *
 * @returns an en dash for null, undefined, NaN and infinities; never a minus before zero
 * @example fixed(-1234.5, 2) // "−1,234.50"
 */
export function fixed(value: Maybe, digits: number): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return ABSENT;
  // Beyond 1e21 toFixed turns to exponents; no quantity of ours lives there, but an answer must come.
  if (Math.abs(value) >= 1e21) return String(value).replace("-", MINUS);
  const [whole = "0", fraction] = Math.abs(value).toFixed(digits).split(".");
  const grouped = whole.replace(/\B(?=(\d{3})+$)/g, ",");
  const text = fraction === undefined ? grouped : `${grouped}.${fraction}`;
  return value < 0 && /[1-9]/.test(text) ? `${MINUS}${text}` : text;
}

/**
 * As `fixed`, with a plus before positive values: for differences.
 *
 * @example signed(0.06, 2) // "+0.06"
 */
export function signed(value: Maybe, digits: number): string {
  const text = fixed(value, digits);
  const positive = typeof value === "number" && value > 0 && /[1-9]/.test(text);
  return positive && Number.isFinite(value) ? `+${text}` : text;
}

/** A figure and its unit, unbreakable; the en dash of an absent value stays without unit. `°` follows without a space. */
export function withUnit(figure: string, unit: string): string {
  if (figure === ABSENT || unit === "") return figure;
  return unit === "\u00b0" ? `${figure}${unit}` : `${figure}${NBSP}${unit}`;
}

/** Energy in kcal/mol (2 decimals) or, converted by the caller, kJ/mol (1 decimal); without the unit. */
export function formatEnergy(value: Maybe, unit: "kcal/mol" | "kJ/mol" = "kcal/mol"): string {
  return fixed(value, unit === "kcal/mol" ? 2 : 1);
}

/** A window's decimals where two do not tell it from the next conformer; what lies closer is the same energy to anybody. */
const MOST_WINDOW_DIGITS = 6;

/**
 * A window as it is printed and taken over: rounded up, since "within" has no slack and a number rounded down would
 * lose the conformer that it was read off from. Two decimals, or as many more as keep the next conformer out, so that
 * the counts and shares said of it hold for the printed number too.
 *
 * Rounded up by comparing doubles, not by scaling them: 1.1 x 100 is 110.00000000000001, and 1.1 stays 1.1.
 *
 * @param kcal kcal/mol, read off a curve
 * @param next kcal/mol, the window that takes in one conformer more; none where left out
 * @example windowToCarry(2.040877) // 2.05; windowToCarry(2.040877, 2.045) // 2.041
 */
export function windowToCarry(kcal: number, next = Number.POSITIVE_INFINITY): number {
  for (let digits = 2; digits <= MOST_WINDOW_DIGITS; digits++) {
    const up = roundedUp(kcal, digits);
    if (up < next) return up;
  }
  return roundedUp(kcal, 2);
}

function roundedUp(value: number, digits: number): number {
  const near = Number(value.toFixed(digits));
  return near >= value ? near : Number((near + 10 ** -digits).toFixed(digits));
}

/**
 * A window that must keep what is said of it, kcal/mol, without the unit: `windowToCarry` in digits.
 *
 * @example formatWindowToCarry(6.084513) // "6.09"
 */
export function formatWindowToCarry(kcal: Maybe, next?: number): string {
  if (kcal === null || kcal === undefined || !Number.isFinite(kcal)) return ABSENT;
  return formatWindowAsSet(windowToCarry(kcal, next));
}

/**
 * A window that somebody set, kcal/mol, without the unit: two decimals, or as many more as it was set with.
 *
 * @example formatWindowAsSet(2.5) // "2.50"; formatWindowAsSet(2.041) // "2.041"
 */
export function formatWindowAsSet(kcal: Maybe): string {
  let digits = 2;
  while (digits < MOST_WINDOW_DIGITS && Number(kcal?.toFixed(digits)) !== kcal) digits++;
  return fixed(kcal, digits);
}

/**
 * Population in per cent, from a fraction; without the sign.
 *
 * @param digits 1 in tables, 0 in the finding
 * @example formatPopulation(0.28549) // "28.5"
 */
export function formatPopulation(fraction: Maybe, digits = 1): string {
  return fixed(fraction === null || fraction === undefined ? null : fraction * 100, digits);
}

/** A fraction as per cent with its sign: "69 %". */
export function formatPercent(fraction: Maybe, digits = 0): string {
  return withUnit(formatPopulation(fraction, digits), "%");
}

/** RMSD in Å, 3 decimals. Coordinates of 4 to 6 decimals carry noise below 0.001 Å: there the figure says "below 0.001". */
export function formatRmsd(value: Maybe): string {
  return typeof value === "number" && value > 0 && value < 0.001 ? "below 0.001" : fixed(value, 3);
}

/**
 * How a column of RMSDs in Å is written beside a limit: all with as many decimals, and no more of them than show on
 * which side of the limit each lies.
 *
 * @example rmsdsBeside([0.1502, 0.3], 0.15)(0.3) // "0.3000"
 */
export function rmsdsBeside(values: readonly number[], limit: number): (value: number) => string {
  const told = (value: number, digits: number) =>
    value === limit || fixed(value, digits) !== fixed(limit, digits);
  let digits = 3;
  while (digits < 6 && !values.every((value) => told(value, digits))) digits += 1;
  return (value) => (digits === 3 || (value > 0 && value < 0.001) ? formatRmsd(value) : fixed(value, digits));
}

/** Any other distance in Å, 2 decimals. */
export function formatDistance(value: Maybe): string {
  return fixed(value, 2);
}

/** Angle or torsion in degrees, without decimals and without the sign of the unit. */
export function formatAngle(value: Maybe): string {
  return fixed(value, 0);
}

/**
 * Temperature in K, up to 2 decimals, never grouped.
 *
 * @example formatTemperature(300) // "300"; formatTemperature(298.15) // "298.15"
 */
export function formatTemperature(value: Maybe): string {
  return trimmed(value, 2).replaceAll(",", "");
}

/** A number with up to `digits` decimals, without trailing zeros: for tolerances and windows in sentences. */
export function trimmed(value: Maybe, digits: number): string {
  const text = fixed(value, digits);
  return text.includes(".") ? text.replace(/\.?0+$/, "") : text;
}

/** A count with grouped thousands. */
export function formatCount(value: Maybe): string {
  return fixed(value, 0);
}

/** What Copy puts on the clipboard: the shortest decimal that reads back as the same double, with an ASCII minus. */
export function rawValue(value: number): string {
  return String(value);
}

/** The raw value as it is shown: every digit, U+2212, ungrouped. */
export function formatRaw(value: number): string {
  return String(value).replaceAll("-", MINUS);
}

const WORDS = "no one two three four five six seven eight nine ten eleven twelve".split(" ");

/**
 * A count as a word up to twelve, in figures beyond; for sentences.
 *
 * @example countWord(9) // "nine"; countWord(31) // "31"
 */
export function countWord(value: number): string {
  return WORDS[value] ?? formatCount(value);
}

/**
 * A count with its noun.
 *
 * @example plural(1, "frame") // "1 frame"; plural(1200, "frame") // "1,200 frames"
 */
export function plural(value: number, one: string, many = `${one}s`): string {
  return `${formatCount(value)} ${value === 1 ? one : many}`;
}

/** The same with the count as a word up to twelve: "nine ensembles", "no ensembles". */
export function pluralWord(value: number, one: string, many = `${one}s`): string {
  return `${countWord(value)} ${value === 1 ? one : many}`;
}

/** First letter in capitals: for a sentence that begins with a computed word. */
export function capital(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1);
}

const SIZES = ["bytes", "kB", "MB", "GB"] as const;

/**
 * Size of a file in steps of 1024, as the limits count (512 MB is 512 x 2^20 bytes).
 *
 * @example formatBytes(1_153_434) // "1.1 MB"
 */
export function formatBytes(bytes: Maybe): string {
  if (bytes === null || bytes === undefined || !Number.isFinite(bytes)) return ABSENT;
  let value = bytes;
  let step = 0;
  while (value >= 1024 && step < SIZES.length - 1) {
    value /= 1024;
    step++;
  }
  const digits = step >= 2 && value < 10 ? 1 : 0;
  return withUnit(fixed(value, digits), bytes === 1 ? "byte" : (SIZES[step] ?? "bytes"));
}

/**
 * A span of time in words, rounded as one would say it.
 *
 * @example formatSeconds(0.104) // "0.1 s"; formatSeconds(0.002) // "under 0.01 s"; formatSeconds(130) // "2 min"
 */
export function formatSeconds(seconds: Maybe): string {
  if (seconds === null || seconds === undefined || !Number.isFinite(seconds)) return ABSENT;
  if (seconds < 0.01) return `under ${withUnit("0.01", "s")}`;
  if (seconds < 10) return withUnit(fixed(seconds, seconds < 0.1 ? 2 : 1), "s");
  if (seconds < 90) return withUnit(fixed(seconds, 0), "s");
  if (seconds < 5400) return withUnit(fixed(seconds / 60, 0), "min");
  return withUnit(fixed(seconds / 3600, 1), "h");
}

const MONTHS = [
  "January",
  "February",
  "March",
  "April",
  "May",
  "June",
  "July",
  "August",
  "September",
  "October",
  "November",
  "December",
];

/** Calendar parts in UTC, or null where the text is no time. */
function parts(iso: string): { day: number; month: string; year: number; time: string; key: number } | null {
  const at = new Date(iso);
  if (Number.isNaN(at.getTime())) return null;
  const two = (n: number) => String(n).padStart(2, "0");
  return {
    day: at.getUTCDate(),
    month: MONTHS[at.getUTCMonth()]!,
    year: at.getUTCFullYear(),
    time: `${two(at.getUTCHours())}:${two(at.getUTCMinutes())}`,
    key: Math.floor(at.getTime() / 86_400_000),
  };
}

/** "1 December 2026", UTC. */
export function formatDate(iso: string): string {
  const p = parts(iso);
  return p ? `${p.day} ${p.month} ${p.year}` : ABSENT;
}

/** "1 Dec 2026", UTC: for tables. */
export function formatDateShort(iso: string): string {
  const p = parts(iso);
  return p ? `${p.day} ${p.month.slice(0, 3)} ${p.year}` : ABSENT;
}

/** "14:02", UTC. */
export function formatTime(iso: string): string {
  return parts(iso)?.time ?? ABSENT;
}

/** "1 December 2026, 14:02 UTC". */
export function formatDateTime(iso: string): string {
  const p = parts(iso);
  return p ? `${p.day} ${p.month} ${p.year}, ${p.time} UTC` : ABSENT;
}

/**
 * A moment as a table says it, seen from `nowIso`: "today 14:02", "yesterday", else the short date. Days are UTC days.
 *
 * @param nowIso the same on server and browser: pass on what the loader gave
 */
export function formatMoment(iso: string, nowIso: string): string {
  const at = parts(iso);
  const now = parts(nowIso);
  if (!at || !now) return ABSENT;
  if (at.key === now.key) return `today ${at.time}`;
  if (at.key === now.key - 1) return "yesterday";
  return formatDateShort(iso);
}

/** First and last digits of a checksum: "9c41 0b7e … 5d20". */
export function formatChecksum(hex: string): string {
  return hex.length <= 12 ? hex : `${hex.slice(0, 4)} ${hex.slice(4, 8)} \u2026 ${hex.slice(-4)}`;
}

export interface FormulaPart {
  text: string;
  as: "plain" | "sub" | "sup";
}

/**
 * A formula cut into runs for `<sub>` and `<sup>`: counts follow an element or a bracket, mass numbers open a square
 * bracket, the sign of a single charge ends the formula.
 *
 * @example formulaParts("C11H17") // C, sub 11, H, sub 17
 */
export function formulaParts(formula: string): FormulaPart[] {
  const found: FormulaPart[] = [];
  const add = (text: string, as: FormulaPart["as"]) => {
    const last = found.at(-1);
    if (last && last.as === as) last.text += text;
    else found.push({ text, as });
  };
  for (const [, mass, count, charge, other] of formula.matchAll(
    /(?<=\[)(\d+)|(?<=[A-Za-z\])])(\d+)|([+-])$|(.)/gsu,
  )) {
    if (mass) add(mass, "sup");
    else if (count) add(count, "sub");
    else if (charge) add(charge.replace("-", MINUS), "sup");
    else if (other) add(other, "plain");
  }
  return found;
}

/**
 * The step of the depth tint, 1 to 7, for a population given as a fraction: below 1 %, then from 1, 2, 5, 10, 20, 40 %.
 *
 * @example depthStep(0.285) // 6
 */
export function depthStep(fraction: number): 1 | 2 | 3 | 4 | 5 | 6 | 7 {
  if (fraction >= 0.4) return 7;
  if (fraction >= 0.2) return 6;
  if (fraction >= 0.1) return 5;
  if (fraction >= 0.05) return 4;
  if (fraction >= 0.02) return 3;
  return fraction >= 0.01 ? 2 : 1;
}

/** Spellings of a unit that keyboards offer. */
const UNIT_SPELLINGS: Readonly<Record<string, readonly string[]>> = {
  Å: ["å", "a", "angstrom", "ångström"],
  "kcal/mol": ["kcal/mol", "kcal\u00b7mol-1", "kcal"],
  K: ["k", "kelvin"],
};

/** "1,234" may mean either of two numbers; "310,5", "0,300" and "1234,567" mean one. */
const ONE_COMMA = /^[+-]?\d*,\d+([eE][+-]?\d+)?$/;
const GROUPED = /^[+-]?[1-9]\d{0,2},\d{3}([eE]|$)/;

/**
 * What a person typed into a number field. The whole text must be a number: no `parseFloat`. U+2212, spaces of any kind, a
 * decimal comma where it can mean nothing else, and the field's own unit behind the number are read.
 *
 * @param unit of the field; another one is refused
 * @returns the number, or null and, where it can be told, what was wrong with the text
 * @example readNumber("298,15 K", "K") // { value: 298.15 }; readNumber("1,234").fault // "The comma in 1,234 …"
 */
export function readNumber(
  text: string,
  unit?: string,
): { value: number } | { value: null; fault: string | null } {
  const whole = text.replace(/[\s\u00a0\u202f]/g, "").replaceAll(MINUS, "-");
  const [, figures = "", behind = ""] = /^([+-]?[\d.,]*\d[.,]?(?:[eE][+-]?\d+)?)(\D.*)?$/.exec(whole) ?? [];
  const shown = text.trim();
  if (figures === "") return { value: null, fault: null };
  if (behind !== "" && !isUnit(behind, unit)) {
    const ours = unit === undefined ? "a number alone" : `a number in ${unit}`;
    return {
      value: null,
      fault: /^[+-]?[\d.,]/.test(behind) ? null : `“${shown}” ends in “${behind}”: ${ours} is read here.`,
    };
  }
  if (GROUPED.test(figures))
    return {
      value: null,
      fault: `The comma in “${shown}” may part thousands or decimals: use a point, or no comma.`,
    };
  const plain = ONE_COMMA.test(figures) ? figures.replace(",", ".") : figures;
  if (plain.includes(","))
    return { value: null, fault: `“${shown}” holds more than a decimal sign: use one point.` };
  if (!/^[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d+)?$/.test(plain)) return { value: null, fault: null };
  const value = Number(plain);
  return Number.isFinite(value) ? { value } : { value: null, fault: null };
}

function isUnit(text: string, unit: string | undefined): boolean {
  if (unit === undefined) return false;
  const typed = text.toLowerCase();
  return typed === unit.toLowerCase() || (UNIT_SPELLINGS[unit]?.includes(typed) ?? false);
}

/** As `readNumber`, for those who say themselves what would be right. */
export function readTyped(text: string, unit?: string): number | null {
  return readNumber(text, unit).value;
}
