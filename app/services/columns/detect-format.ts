import { IntakeRejection } from "../../lib/intake/reject.ts";
import type { IntakeMessage } from "../../lib/intake/report.ts";
import { sniff } from "../../lib/text/sniff.ts";
import { readHead } from "../ensembles/read-head.ts";

export interface DetectedFile {
  format: "table" | "xyz" | "sdf" | "unknown";
  /** All bytes, the first ones too. */
  bytes: AsyncGenerator<Uint8Array, void, undefined>;
}

const TABLE_NAME = /\.(?:csv|tsv|tab)(?:\.gz)?$/i;

/** Small tables, and those without a header, do not show what they are: then their name decides, or a delimiter. */
function formatOf(
  name: string,
  head: Uint8Array,
  remark: (message: IntakeMessage) => void,
): DetectedFile["format"] {
  const found = sniff(head, name);
  const byName = TABLE_NAME.test(name);
  if (found.container !== "none") {
    throw new IntakeRejection({
      code: "G09",
      file: name,
      message: `This is ${found.container === "zip" ? "a zip archive" : "gzip inside of gzip"}.`,
      hint: "Unpack it and send the file itself.",
    });
  }
  if (found.refusal?.code === "G06" && byName) {
    throw new IntakeRejection({ code: "G06", file: name, message: "The table has no rows." });
  }
  if (found.refusal && !(byName && found.refusal.code === "G10")) {
    const hint = byName && found.refusal.code === "G04" ? "Export the table as CSV." : found.refusal.hint;
    throw new IntakeRejection({ file: name, ...found.refusal, hint });
  }
  if (found.format === "csv" || found.format === "sdf") {
    if (found.remark && found.format === "sdf") remark({ ...found.remark, severity: "remark", file: name });
    return found.format === "csv" ? "table" : "sdf";
  }
  if (byName) return "table";
  if (found.format === "xyz") return "xyz";
  return "table";
}

/**
 * Tells a table from a structure file by its first unpacked bytes.
 *
 * @throws IntakeRejection where it is neither (rows G04, G06, G09, G10)
 */
export async function detectFormat(
  name: string,
  bytes: AsyncIterable<Uint8Array>,
  remark: (message: IntakeMessage) => void,
): Promise<DetectedFile> {
  const { head, bytes: whole, close } = await readHead(bytes);
  try {
    return { format: formatOf(name, head, remark), bytes: whole };
  } catch (error) {
    await close();
    throw error;
  }
}
