import { eq } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { isDuplicate } from "../../db/driver-errors.server.ts";
import { ensembles } from "../../db/schema.server.ts";
import { type UploadFields, uploadFieldsSchema } from "../../lib/api/schemas.ts";
import { DomainError } from "../../lib/errors.ts";
import { escapeControls } from "../../lib/text/escape.ts";
import { type Actor, accessTeam, type Grant } from "../auth/access.server.ts";
import { log } from "../log.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { type CompletedReading, completeReading, type WrittenAnswers } from "./complete-reading.server.ts";
import { DEFAULT_SERIES, seriesByName } from "./create-series.server.ts";
import { levelsInUse } from "./intake-rows.server.ts";
import { type FormPart, type FormReader, fileBytes } from "./read-multipart.server.ts";
import { Reading } from "./reading.server.ts";
import { answerSameFiles, filesSha, findSameFiles } from "./same-files.server.ts";
import { siftAfterIntake } from "./sift-after-intake.server.ts";
import { FileStore, pointFiles } from "./store-files.server.ts";

const PUBLISH_TRIES = 4;

export interface TakenIn {
  ensembleId: string;
  teamId: string;
  /** False where the same files with the same answers were here before. */
  created: boolean;
}

function invalid(field: string, message: string): DomainError {
  return new DomainError("invalid", "The upload is not right", message, { faults: [{ field, message }] });
}

/** The fields of a form beside its files, each once. */
class Fields {
  private readonly values: Record<string, string> = Object.create(null);
  private readonly allowed: ReadonlySet<string>;

  constructor(interactive: boolean) {
    this.allowed = new Set([...Object.keys(uploadFieldsSchema.shape), ...(interactive ? ["team"] : [])]);
  }

  add(name: string, value: string): void {
    if (!this.allowed.has(name)) {
      throw invalid(name, `There is no field "${name}". Files go into "file".`);
    }
    if (name in this.values) throw invalid(name, `The field "${name}" stands twice.`);
    // A form sends what was left empty too.
    if (value.trim() !== "") this.values[name] = value;
  }

  get(name: string): string | null {
    return this.values[name] ?? null;
  }

  check(): UploadFields {
    const { team: _, ...rest } = this.values;
    const read = uploadFieldsSchema.safeParse(rest);
    if (read.success) return read.data;
    const faults = read.error.issues.map((issue) => ({
      field: issue.path.join("."),
      message: issue.message,
    }));
    const detail = faults.map((fault) => `${fault.field}: ${fault.message}`).join(" ");
    throw new DomainError("invalid", "The upload is not right", detail, { faults });
  }
}

/** One upload on its way: what it wrote so far, and how to take that back. */
class Upload {
  readonly reading: Reading;
  readonly store: FileStore;
  private readonly grant: Grant;

  constructor(grant: Grant, energyFrom: string | null) {
    this.grant = grant;
    this.reading = new Reading(grant.teamId, energyFrom === "none" ? null : energyFrom);
    this.store = new FileStore(grant.teamId);
  }

  begin(): Promise<void> {
    return this.reading.begin(this.grant);
  }

  async readFile(part: Extract<FormPart, { kind: "file" }>): Promise<void> {
    const plain = escapeControls(part.filename).trim();
    const name = plain === "" ? `file ${this.reading.files.length + 1}` : [...plain].slice(0, 255).join("");
    const writer = await this.store.begin(name);
    await this.reading.readFile(name, this.store.keep(name, fileBytes(part.data), writer));
  }

  async discard(): Promise<void> {
    try {
      await this.reading.discard();
      await this.store.discard();
    } catch (error) {
      // The sweeper finds what is left.
      log.warn({ err: error }, "upload not taken back");
    }
  }
}

function writtenAnswers(fields: UploadFields): WrittenAnswers {
  return {
    energyUnit: fields.energyUnit ?? null,
    energyFrom: fields.energyFrom ?? null,
    level: fields.level ?? null,
    energyKind: fields.energyKind ?? "electronic",
    energyTemperature: fields.energyTemperature ?? null,
  };
}

/** "run3.xyz.gz" becomes "run3". */
function nameOfFile(name: string): string {
  const stem = name.replace(/(\.[A-Za-z0-9]{1,8}){1,2}$/, "").trim();
  return [...(stem === "" ? name : stem)].slice(0, 200).join("");
}

interface Finish {
  upload: Upload;
  grant: Grant;
  fields: UploadFields;
  interactive: boolean;
}

/** The last act: from one moment to the next the ensemble is there, with its files and its entry in the logbook. */
async function publish(
  { upload, grant, fields }: Finish,
  sha: Buffer,
  written: WrittenAnswers,
  done: CompletedReading,
): Promise<void> {
  const { reading, store } = upload;
  const name = fields.name ?? nameOfFile(reading.files[0]?.name ?? "Ensemble");
  const act = async (tx: Transaction) => {
    await pointFiles(tx, reading.ensembleId, await store.publish(tx));
    const seriesId = await seriesByName(tx, grant.teamId, fields.series ?? DEFAULT_SERIES, grant);
    const now = new Date();
    await tx
      .update(ensembles)
      .set({
        name,
        seriesId,
        filesSha: sha,
        deletedAt: null,
        readingSince: null,
        createdAt: now,
        changedAt: now,
      })
      .where(eq(ensembles.id, reading.ensembleId));
    const files = reading.files.map((file, at) => ({
      name: file.name,
      sha256: store.written[at]?.sha256.toString("hex") ?? "",
      bytes: store.written[at]?.bytes ?? 0,
    }));
    const { energyUnit, energyFrom, level } = written;
    await writeEntry(tx, { teamId: grant.teamId, ensembleId: reading.ensembleId }, grant, {
      type: "intake",
      data: {
        name,
        files,
        answers: { energyUnit, energyFrom, level },
        questions: done.questions,
        ...done.counts,
      },
    });
  };
  // Without locks on gaps: uploads of the same files at once wait for the first, instead of ending each other.
  await inTransaction(act, { isolation: "read committed" });
}

async function finish(all: Finish): Promise<TakenIn> {
  const { upload, grant, fields, interactive } = all;
  const written = writtenAnswers(fields);
  const sha = filesSha(upload.store.written.map((file) => file.sha256));
  const known = await findSameFiles(grant.teamId, sha);
  if (known) {
    return { ensembleId: answerSameFiles(known, written, all), teamId: grant.teamId, created: false };
  }
  const result = await upload.reading.end();
  const done = await completeReading(upload.reading, result, {
    answers: written,
    kindStated: fields.energyKind !== undefined,
    written,
    mode: {
      refuseOpen: !interactive,
      confirmUnit: interactive,
      knownLevels: interactive ? await levelsInUse(grant.teamId) : [],
    },
    sources: upload.store.written.map((file) => file.sourceId),
  });
  for (let attempt = 1; ; attempt++) {
    try {
      await publish(all, sha, written, done);
      break;
    } catch (error) {
      if (!isDuplicate(error)) throw error;
      // Somebody was faster by a moment: with the same ensemble, or only with one of its files or its series.
      const winner = await findSameFiles(grant.teamId, sha);
      if (winner) {
        return { ensembleId: answerSameFiles(winner, written, all), teamId: grant.teamId, created: false };
      }
      if (attempt >= PUBLISH_TRIES) throw error;
    }
  }
  const { ensembleId } = upload.reading;
  await siftAfterIntake({ ...grant, ensembleId });
  return { ensembleId, teamId: grant.teamId, created: true };
}

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
}): Promise<TakenIn> {
  const { grantOf, form, interactive } = options;
  const fields = new Fields(interactive);
  let upload: Upload | null = null;
  let grant: Grant | null = null;
  try {
    for await (const part of form.parts()) {
      if (part.kind === "field") {
        fields.add(part.name, part.value);
        continue;
      }
      if (part.name !== "file")
        throw invalid(part.name, `There is no field "${part.name}". Files go into "file".`);
      grant ??= await grantOf(fields.get("team"));
      if (upload === null) {
        upload = new Upload(grant, fields.get("energyFrom"));
        await upload.begin();
      }
      await upload.readFile(part);
    }
    const checked = fields.check();
    if (upload === null || grant === null)
      throw invalid("file", 'No file came. Send it in the field "file".');
    const taken = await finish({ upload, grant, fields: checked, interactive });
    if (!taken.created) await upload.discard();
    else await upload.store.discard();
    return taken;
  } catch (error) {
    await upload?.discard();
    await form.drain();
    throw error;
  }
}

/** Takes files in as a token, into its one team, or as a person, into the team that the form names. */
export function takeIn(options: { actor: Actor; form: FormReader }): Promise<TakenIn> {
  const { actor, form } = options;
  const own = actor.kind === "token" ? actor.teamId : null;
  return takeInFor({
    grantOf: (team) => accessTeam(actor, "take-in", own ?? team ?? ""),
    form,
    interactive: own === null,
  });
}
