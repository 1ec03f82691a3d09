import { IntakeRejection } from "../../lib/intake/reject.ts";
import type { IntakeMessage } from "../../lib/intake/report.ts";
import { SNIFF_BYTES, type Sniffed, sniff } from "../../lib/text/sniff.ts";

/** What is recognised and not read yet; null for what its reader takes, or finds the fault of. */
function unread(found: Sniffed): string | null {
  if (found.container === "zip") return "a zip archive";
  if (found.container === "gzip") return "gzip";
  if (found.format === "sdf") return "SDF";
  return found.format === "csv" ? "a table" : null;
}

function checkHead(name: string, head: Uint8Array, remark: (message: IntakeMessage) => void): void {
  const found = sniff(head, name);
  if (found.refusal) throw new IntakeRejection({ file: name, ...found.refusal });
  const what = unread(found);
  if (what !== null) {
    throw new IntakeRejection({
      code: "G10",
      file: name,
      message: `This is ${what}. This version reads XYZ and extended XYZ, plain or gzip.`,
      hint: "Write the structures as XYZ and send them again.",
    });
  }
  if (found.remark) remark({ ...found.remark, severity: "remark", file: name });
}

/**
 * Passes a file's unpacked bytes on, once the first of them have said that its reader can take them.
 *
 * @throws IntakeRejection where they say otherwise (rows G04, G06, G10)
 */
export async function* checkFormat(
  name: string,
  bytes: AsyncIterable<Uint8Array>,
  remark: (message: IntakeMessage) => void,
): AsyncGenerator<Uint8Array, void, undefined> {
  let head: Uint8Array | null = new Uint8Array(0);
  for await (const chunk of bytes) {
    if (head === null) yield chunk;
    else {
      head = Buffer.concat([head, chunk]);
      if (head.length < SNIFF_BYTES) continue;
      checkHead(name, head, remark);
      yield head;
      head = null;
    }
  }
  if (head === null) return;
  checkHead(name, head, remark);
  yield head;
}
