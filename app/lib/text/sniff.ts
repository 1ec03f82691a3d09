import { decodeText, encodingByMark, Utf8Stream } from "./decode.ts";
import { hasRecordEnd, type TextFormat, textFormat } from "./text-format.ts";

/** What the first bytes of a file are. Content decides; the name only hints (row G01). */
export interface Sniffed {
  /** How the bytes are packed; for gzip sniff again behind it. */
  readonly container: "none" | "gzip" | "zip";
  /** Format of unpacked text; "unknown" leaves it to the XYZ reader to say what line 1 lacks. */
  readonly format: TextFormat;
  /** Why the file cannot be taken in at all (rows G04, G06, G10), or null. */
  readonly refusal: { readonly code: string; readonly message: string; readonly hint: string } | null;
  /** Name and content disagree (row G01), or null. */
  readonly remark: { readonly code: string; readonly message: string } | null;
}

/** So many bytes are enough for nearly all files. */
const SNIFF_BYTES = 4096;
/** So many are looked at where these leave it open: a record of a thousand atoms with its bonds has 90 kB. */
export const WIDE_BYTES = 128 * 1024;

const WAY_OUT = "Write the structures as XYZ or SDF, plain or gzip.";

/** Leading bytes as Latin-1 text, and what they announce. */
const SIGNATURES: readonly (readonly [prefix: string, code: string, looksLike: string])[] = [
  ["BZh", "G10", "a bzip2 archive (.bz2)"],
  ["\xfd7zXZ\0", "G10", "an xz archive (.xz)"],
  ["(\xb5/\xfd", "G10", "a Zstandard archive (.zst)"],
  ["7z\xbc\xaf'\x1c", "G10", "a 7-Zip archive (.7z)"],
  ["Rar!", "G10", "a RAR archive"],
  ["\x1f\x9d", "G10", "a compress archive (.Z)"],
  ["%PDF", "G04", "a PDF"],
  ["\x89PNG", "G04", "an image"],
  ["\xff\xd8\xff", "G04", "an image"],
  ["GIF8", "G04", "an image"],
  ["II*\0", "G04", "an image"],
  ["MM\0*", "G04", "an image"],
  ["\xd0\xcf\x11\xe0", "G04", "a spreadsheet or an office document"],
  ["\x89HDF", "G04", "a binary data file (HDF5)"],
  ["CDF\x01", "G04", "a binary data file (NetCDF)"],
  ["CDF\x02", "G04", "a binary data file (NetCDF)"],
  ["\x7fELF", "G04", "a program"],
  ["MZ", "G04", "a program"],
  ["SQLite format 3", "G04", "a database file"],
  ["{\\rtf", "G04", "an office document (RTF)"],
];

/** Beginnings of lines that only one text format has. */
const TEXT_FORMATS: readonly (readonly [line: RegExp, looksLike: string])[] = [
  [/^(?:HEADER|COMPND|REMARK|CRYST1|MODEL |ATOM {2}|HETATM)/, "a PDB file"],
  [/^@<TRIPOS>/, "a MOL2 file"],
  [/^data_\S*\s*$/, "a CIF file"],
  [/^(?:_cell_|_atom_site|loop_\s*$)/, "a CIF file"],
  [/^<(?:\?xml|!DOCTYPE|html|svg|cml|[a-z]+[ >])/i, "an XML or HTML file"],
  [/^[{[]\s*(?:"|$|\{)/, "a JSON file"],
  [
    /^(?:%chk|%mem|%nproc|# ?[a-z0-9/()+-]+.*\bopt\b|\$coord|&CONTROL|&SYSTEM)/i,
    "the input of a calculation",
  ],
  [
    /\b(?:SCF Done|Total Energy|FINAL SINGLE POINT|Normal termination|Input orientation)\b/i,
    "the output of a calculation",
  ],
  [/\bPsi4\b/, "the output of Psi4"],
  // Rules and banners, versions, and what calculations report: no structure file has them.
  [/^\s*([-=*#_+~])\1{19,}\s*$/, "the output of a program"],
  [/\b(?:version|release|revision)\b[ :]*v?\d+\.\d/i, "the output of a program"],
  [
    /\b(?:basis set|wall time|cpu time|number of (?:basis functions|electrons)|SCF (?:iterations?|converge\w*)|Hartree[- ]Fock|gradient norm)\b/i,
    "the output of a calculation",
  ],
  [
    /\b(?:CARTESIAN COORDINATES|Program Version|Copyright|Calculation started)\b/i,
    "the output of a calculation",
  ],
];

/**
 * Names container and format from a file's first bytes (`WIDE_BYTES` are enough), or says why it cannot be taken in.
 *
 * @param bytes as uploaded, or as they come out of gzip
 * @param name the file's name, for the remark where it disagrees
 * @example sniff(new TextEncoder().encode("3\nwater\nO 0 0 0\n"), "water.xyz").format // "xyz"
 */
export function sniff(bytes: Uint8Array, name: string): Sniffed {
  const head = bytes.subarray(0, SNIFF_BYTES);
  const packed = sniffPacked(head);
  if (packed) return packed;
  const text = headText(head);
  if (text.includes("\0"))
    return refuse("G04", "This is not a text file.", "Export the structures as XYZ or SDF.");
  if (text.trim() === "") {
    // A head of blanks may still be followed by frames: the reader decides. No bytes at all are clear.
    if (bytes.length > 0) return { container: "none", format: "unknown", refusal: null, remark: null };
    return refuse("G06", "The file has no frames.", "It is empty: was it written to the end?");
  }
  const lines = linesOf(text);
  const shown = textFormat(lines);
  const record = shown.open && bytes.length > SNIFF_BYTES && endsRecord(bytes);
  if (shown.format === "unknown" && !record) {
    const other = otherText(lines);
    if (other) return refuse("G10", `This looks like ${other}, which is not read.`, WAY_OUT);
  }
  // Where the content leaves it open the name decides, which else only hints.
  const format = record || (shown.open && expectedByName(name) === "sdf") ? "sdf" : shown.format;
  return { container: "none", format, refusal: null, remark: disagreement(format, name) };
}

function refuse(code: string, message: string, hint: string): Sniffed {
  return { container: "none", format: "unknown", refusal: { code, message, hint }, remark: null };
}

function sniffPacked(head: Uint8Array): Sniffed | null {
  const start = latin1(head, 0, 16);
  if (start.startsWith("\x1f\x8b"))
    return { container: "gzip", format: "unknown", refusal: null, remark: null };
  if (start.startsWith("PK\x03\x04") || start.startsWith("PK\x05\x06")) return sniffZip(head);
  if (latin1(head, 257, 262) === "ustar")
    return refuse("G10", "This looks like a tar archive, which is not read.", WAY_OUT);
  if (start.startsWith("RIFF") && latin1(head, 8, 12) === "WEBP") return notText("an image");
  if (start.startsWith("BM") && head.subarray(0, 64).includes(0)) return notText("an image");
  const known = SIGNATURES.find(([prefix]) => start.startsWith(prefix));
  if (!known) return null;
  const [, code, looksLike] = known;
  return code === "G04"
    ? notText(looksLike)
    : refuse(code, `This looks like ${looksLike}, which is not read.`, WAY_OUT);
}

/** Office files are zip archives whose first entries give them away. */
function sniffZip(head: Uint8Array): Sniffed {
  const names = latin1(head, 0, head.length);
  const office = /\[Content_Types\]\.xml|_rels\/|xl\/|word\/|mimetypeapplication\/vnd\./.test(names);
  if (!office) return { container: "zip", format: "unknown", refusal: null, remark: null };
  return notText(/word\/|opendocument\.text/.test(names) ? "an office document" : "a spreadsheet");
}

function notText(looksLike: string): Sniffed {
  const table = looksLike.includes("spreadsheet");
  const hint = table ? "Export it as CSV." : "Export the structures as XYZ or SDF.";
  return refuse("G04", `This is not a text file (looks like ${looksLike}).`, hint);
}

function latin1(bytes: Uint8Array, from: number, to: number): string {
  let text = "";
  // A call takes only so many arguments.
  for (let at = from; at < to && at < bytes.length; at += SNIFF_BYTES) {
    text += String.fromCharCode(...bytes.subarray(at, Math.min(to, at + SNIFF_BYTES)));
  }
  return text;
}

function headText(head: Uint8Array): string {
  if (encodingByMark(head) !== "utf-8") {
    const stream = new Utf8Stream();
    const decoded = stream.push(head);
    return decodeText(decoded, 0, decoded.length).text;
  }
  const stream = new Utf8Stream();
  const bytes = stream.push(head);
  return latin1(bytes, 0, bytes.length);
}

/** A record larger than the first bytes ends further on. */
function endsRecord(bytes: Uint8Array): boolean {
  return hasRecordEnd(linesOf(headText(bytes.subarray(0, WIDE_BYTES))));
}

const linesOf = (text: string) => text.split(/\r\n|\r|\n/);

function otherText(lines: readonly string[]): string | null {
  for (const line of lines.slice(0, 60)) {
    const found = TEXT_FORMATS.find(([pattern]) => pattern.test(line.slice(0, 200)));
    if (found) return found[1];
  }
  return null;
}

const FORMAT_NAMES = { xyz: "XYZ", sdf: "SDF", csv: "a table" } as const;
const BY_ENDING: Readonly<Record<string, keyof typeof FORMAT_NAMES>> = {
  xyz: "xyz",
  extxyz: "xyz",
  sdf: "sdf",
  sd: "sdf",
  mol: "sdf",
  csv: "csv",
  tsv: "csv",
};

const endingOf = (name: string) => /\.([A-Za-z0-9]+)(?:\.gz)?$/.exec(name)?.[1]?.toLowerCase() ?? "";
const expectedByName = (name: string) => BY_ENDING[endingOf(name)];

function disagreement(format: Sniffed["format"], name: string): Sniffed["remark"] {
  const ending = endingOf(name);
  const expected = BY_ENDING[ending];
  if (format === "unknown" || expected === undefined || expected === format) return null;
  const message = `The name ends in .${ending}, but the content is ${FORMAT_NAMES[format]}; the content counts.`;
  return { code: "G01", message };
}
