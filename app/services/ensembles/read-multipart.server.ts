import { Readable } from "node:stream";
import type { ReadableStream as NodeReadableStream } from "node:stream/web";
import busboy from "busboy";
import { DomainError } from "../../lib/errors.ts";

/** One part of a form, in the order sent. A file's data must be read to its end before the next part comes. */
export type FormPart =
  | { kind: "field"; name: string; value: string }
  | { kind: "file"; name: string; filename: string; data: Readable };

const WRITTEN_OUT = new Map([
  ["%22", '"'],
  ["%0D", "\r"],
  ["%0A", "\n"],
]);

/**
 * A name as the file is called: browsers and curl write `"` and line ends in it as three signs, and nothing else, not even
 * `%` itself (HTML standard, multipart/form-data encoding algorithm).
 */
function plainName(written: string): string {
  return written.replace(/%22|%0D|%0A/g, (found) => WRITTEN_OUT.get(found) ?? found);
}

/** Generous for people, small enough that fields never fill the memory. */
const LIMITS = { fields: 40, fieldSize: 4_096, fieldNameSize: 100, files: 200, headerPairs: 40 };

function broken(detail: string): DomainError {
  return new DomainError("invalid", "The upload is broken", detail, { extra: { status: 400 } });
}

const CUT_OFF =
  "The upload ended before its end mark, most likely a lost connection. Nothing was stored; send it again.";

/** What a failure of the form parser means for whoever sent it. */
function asRefusal(error: unknown): DomainError {
  if (error instanceof DomainError) return error;
  const message = error instanceof Error ? error.message : "";
  if (/unexpected end/i.test(message)) return broken(CUT_OFF);
  return broken(
    'This is no well-formed "multipart/form-data". Send it with a form, or with curl -F file=@NAME.',
  );
}

/** The body as a form: parts in order, and a way to read away what is left of it. */
export interface FormReader {
  parts(): AsyncGenerator<FormPart, void, undefined>;
  /** Reads the rest of the body and throws it away: a client that still sends does not hear an answer. */
  drain(): Promise<void>;
}

/**
 * Opens a multipart body as a stream; nothing of a file is kept.
 *
 * @throws DomainError unsupported (415) for another content type, invalid (400) for a broken form
 */
export function openForm(request: {
  body: ReadableStream<Uint8Array> | null;
  contentType: string | null;
}): FormReader {
  const { body, contentType } = request;
  if (!/^multipart\/form-data\b/i.test(contentType ?? "")) {
    throw new DomainError(
      "unsupported",
      "Not a form with files",
      `Files come as "multipart/form-data" in the field "file"; found ${contentType ?? "no content type"}.`,
    );
  }
  const source = body === null ? Readable.from([]) : Readable.fromWeb(body as NodeReadableStream<Uint8Array>);
  let parser: busboy.Busboy;
  try {
    parser = busboy({
      headers: { "content-type": contentType ?? "" },
      defParamCharset: "utf8",
      limits: LIMITS,
    });
  } catch (error) {
    // Only the boundary can be missing here.
    source.on("error", () => {});
    source.resume();
    throw asRefusal(error);
  }
  return { parts: () => readParts(source, parser), drain: () => drain(source, parser) };
}

async function* readParts(
  source: Readable,
  parser: busboy.Busboy,
): AsyncGenerator<FormPart, void, undefined> {
  const queue: FormPart[] = [];
  let failure: DomainError | null = null;
  let closed = false;
  let wake = () => {};
  const push = (part: FormPart) => {
    queue.push(part);
    wake();
  };
  const fail = (error: unknown) => {
    failure ??= asRefusal(error);
    wake();
  };
  parser.on("file", (name, data, info) => {
    // A failure of the whole form reaches the stream of the file too; whoever reads it hears of it there.
    data.on("error", () => {});
    push({ kind: "file", name: name ?? "", filename: plainName(info.filename ?? ""), data });
  });
  parser.on("field", (name, value, info) => {
    if (info.valueTruncated || info.nameTruncated) {
      const limit = `The field "${name.slice(0, 60)}" is longer than ${LIMITS.fieldSize} characters.`;
      fail(
        new DomainError("invalid", "A field is too long", limit, {
          faults: [{ field: name, message: limit }],
        }),
      );
    } else push({ kind: "field", name, value });
  });
  const tooMany = () =>
    fail(broken(`A form holds at most ${LIMITS.files} files and ${LIMITS.fields} fields.`));
  parser.on("filesLimit", tooMany);
  parser.on("fieldsLimit", tooMany);
  parser.on("error", fail);
  parser.on("close", () => {
    closed = true;
    wake();
  });
  source.on("error", (error) => parser.destroy(error instanceof Error ? error : new Error("source failed")));
  source.pipe(parser);
  for (;;) {
    if (failure !== null) throw failure;
    const next = queue.shift();
    if (next !== undefined) yield next;
    else if (closed) return;
    else {
      await new Promise<void>((resolve) => {
        wake = resolve;
      });
    }
  }
}

async function drain(source: Readable, parser: busboy.Busboy): Promise<void> {
  source.unpipe(parser);
  parser.on("error", () => {});
  parser.destroy();
  if (source.readableEnded || source.destroyed) return;
  await new Promise<void>((resolve) => {
    source.once("end", resolve);
    source.once("close", resolve);
    source.once("error", () => resolve());
    source.resume();
  });
}

/** The bytes of one file of a form; a connection lost in the middle of it is an error, not an end. */
export async function* fileBytes(data: Readable): AsyncGenerator<Uint8Array, void, undefined> {
  try {
    for await (const chunk of data) yield chunk as Uint8Array;
  } catch (error) {
    throw asRefusal(error);
  }
}
