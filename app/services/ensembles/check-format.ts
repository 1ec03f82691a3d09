import { IntakeRejection } from "../../lib/intake/reject.ts";
import type { IntakeMessage } from "../../lib/intake/report.ts";
import { type Sniffed, sniff } from "../../lib/text/sniff.ts";
import { readHead } from "./read-head.ts";

/** A file whose first bytes have said which reader takes it. */
export interface CheckedFile {
  /** "unknown" is left to the reader of XYZ, which says what the first line lacks. */
  format: "xyz" | "sdf" | "unknown";
  /** All bytes, the first ones too. */
  bytes: AsyncGenerator<Uint8Array, void, undefined>;
}

/** What is recognised and no structure file; null for what its reader takes, or finds the fault of. */
function unread(found: Sniffed): string | null {
  return found.format === "csv" ? "a table" : null;
}

function checkHead(
  name: string,
  head: Uint8Array,
  remark: (message: IntakeMessage) => void,
): CheckedFile["format"] {
  const found = sniff(head, name);
  if (found.refusal) throw new IntakeRejection({ file: name, ...found.refusal });
  if (found.container !== "none") {
    throw new IntakeRejection({
      code: "G09",
      file: name,
      message: `The file is packed twice: inside lies ${found.container === "zip" ? "a zip archive" : "a gzip file"}.`,
      hint: "Unpack it once and send it again.",
    });
  }
  const what = unread(found);
  if (what !== null || found.format === "csv") {
    throw new IntakeRejection({
      code: "G10",
      file: name,
      message: `This is ${what ?? "a table"}. Structures are read from XYZ or SDF, plain or gzip.`,
      hint: "Write the structures as XYZ or SDF and send them again. A table of values belongs to an ensemble that is there: add it to its columns.",
    });
  }
  if (found.remark) remark({ ...found.remark, severity: "remark", file: name });
  return found.format;
}

/**
 * Tells by a file's first unpacked bytes which reader takes it.
 *
 * @throws IntakeRejection where none does (rows G04, G06, G10)
 */
export async function checkFormat(
  name: string,
  bytes: AsyncIterable<Uint8Array>,
  remark: (message: IntakeMessage) => void,
): Promise<CheckedFile> {
  const { head, bytes: whole, close } = await readHead(bytes);
  try {
    return { format: checkHead(name, head, remark), bytes: whole };
  } catch (error) {
    await close();
    throw error;
  }
}
