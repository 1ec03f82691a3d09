import type { ColumnFields } from "../../lib/api/schemas.ts";
import { escapeControls } from "../../lib/text/escape.ts";
import { type FormReader, fileBytes } from "../ensembles/read-multipart.server.ts";
import { FileStore } from "../ensembles/store-files.server.ts";
import { ColumnForm, invalidColumns } from "./column-answers.ts";

/** A file that was kept, with what was stated beside it, before or after it. */
export interface ReceivedFile {
  name: string;
  sourceId: string;
  sha256: Buffer;
  fields: ColumnFields;
  store: FileStore;
}

/**
 * Keeps the one file of a form and reads the fields beside it. What answers how to read the file may stand behind it, so
 * that it is read afterwards, from what was kept; `store.discard` takes it back unless it was published.
 *
 * @throws DomainError invalid for another form, what keeping throws; the body is read to its end in any case
 */
export async function receiveFile(teamId: string, form: FormReader): Promise<ReceivedFile> {
  const store = new FileStore(teamId);
  const fields = new ColumnForm();
  let name: string | null = null;
  try {
    for await (const part of form.parts()) {
      if (part.kind === "field") {
        fields.add(part.name, part.value);
        continue;
      }
      if (part.name !== "file")
        throw invalidColumns(part.name, `There is no field "${part.name}". The file goes into "file".`);
      if (name !== null) throw invalidColumns("file", "Send one file a call.");
      const plain = escapeControls(part.filename).trim();
      name = plain === "" ? "table.csv" : [...plain].slice(0, 180).join("");
      const writer = await store.begin(name);
      for await (const _ of store.keep(name, fileBytes(part.data), writer));
    }
    const checked = fields.check();
    const [written] = store.written;
    if (name === null || written === undefined)
      throw invalidColumns("file", 'No file came. Send it in the field "file".');
    return { name, sourceId: written.sourceId, sha256: written.sha256, fields: checked, store };
  } catch (error) {
    await store.discard();
    await form.drain();
    throw error;
  }
}
