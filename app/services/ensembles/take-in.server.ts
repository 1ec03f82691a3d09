import { uploadFieldsSchema } from "../../lib/api/schemas.ts";
import { type Actor, accessTeam, type Grant } from "../auth/access.server.ts";
import { tellOfIntake } from "../mail/long-work.server.ts";
import { finishUpload, type TakenIn } from "./finish-upload.server.ts";
import type { FramesTold } from "./frames-read.server.ts";
import type { FormReader } from "./read-multipart.server.ts";
import { Upload } from "./upload.server.ts";
import { FormFields, invalidField } from "./upload-fields.ts";

/**
 * Takes the files of a form in as one ensemble: one pass over the stream, nothing of it visible before its end.
 *
 * A program names unit and level beside the files or is refused; a person (`interactive`) is asked afterwards. Whatever
 * goes wrong, the body is read to its end and nothing is left behind.
 *
 * @param options.grantOf decides access once the first file comes; `team` is the field of that name, which a form from
 *   the browser sends before its files
 */
export async function takeInFor(options: {
  grantOf(team: string | null): Promise<Grant>;
  form: FormReader;
  interactive: boolean;
  told?: FramesTold;
}): Promise<TakenIn> {
  const { grantOf, form, interactive, told } = options;
  const fields = new FormFields(uploadFieldsSchema, interactive ? ["team"] : []);
  let upload: Upload | null = null;
  let grant: Grant | null = null;
  const began = Date.now();
  try {
    for await (const part of form.parts()) {
      if (part.kind === "field") {
        fields.add(part.name, part.value);
        continue;
      }
      if (part.name !== "file")
        throw invalidField(part.name, `There is no field "${part.name}". Files go into "file".`);
      grant ??= await grantOf(fields.get("team"));
      if (upload === null) {
        upload = new Upload(grant, { energyFrom: fields.get("energyFrom"), told });
        await upload.begin();
      }
      await upload.readFile(part);
    }
    const checked = fields.check();
    if (upload === null || grant === null)
      throw invalidField("file", 'No file came. Send it in the field "file".');
    const taken = await finishUpload({ upload, grant, fields: checked, interactive });
    if (!taken.created) await upload.discard();
    else await upload.store.discard();
    tellOfIntake({ grant, began, ensembleId: taken.ensembleId });
    return taken;
  } catch (error) {
    tellOfIntake({ grant, began, ensembleId: null });
    await upload?.discard();
    await form.drain();
    throw error;
  }
}

/** Takes files in as a token, into its one team, or as a person, into the team that the form names. */
export function takeIn(options: { actor: Actor; form: FormReader; told?: FramesTold }): Promise<TakenIn> {
  const { actor, form, told } = options;
  const own = actor.kind === "token" ? actor.teamId : null;
  return takeInFor({
    grantOf: (team) => accessTeam(actor, "take-in", own ?? team ?? ""),
    form,
    interactive: own === null,
    told,
  });
}
