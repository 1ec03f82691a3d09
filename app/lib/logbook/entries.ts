import { z } from "zod";
import { fixed, formatChecksum, formatCount, formatDate, formatEnergy, plural, withUnit } from "../format.ts";
import { framesWords } from "../workbench/intake-lists.ts";

/**
 * What the logbook can hold: a closed union, so that every old row still parses and has a sentence.
 * Add kinds and optional members; never rename or narrow one that was written.
 */

/** The other ensemble, and the frames of the one they were held in; of many the first are named. */
export const splitFrames = z.object({
  ensembleId: z.string(),
  name: z.string(),
  frames: z.array(z.number()).max(500),
  count: z.number(),
});

const answers = z.object({
  energyUnit: z.string().nullable(),
  energyFrom: z.string().nullable(),
  level: z.string().nullable(),
});
const counts = { frames: z.number(), accepted: z.number(), remarked: z.number(), held: z.number() };

export const logbookEntrySchema = z.discriminatedUnion("type", [
  z.object({ type: z.literal("sign-up"), data: z.object({}) }),
  /** `browser` is the start of a checksum of what the browser calls itself. */
  z.object({ type: z.literal("sign-in"), data: z.object({ browser: z.string().optional() }) }),
  z.object({ type: z.literal("sign-in-failed"), data: z.object({ email: z.string().optional() }) }),
  z.object({ type: z.literal("sign-out"), data: z.object({}) }),
  z.object({ type: z.literal("password-reset-asked"), data: z.object({}) }),
  z.object({ type: z.literal("password-changed"), data: z.object({}) }),
  z.object({ type: z.literal("team-made"), data: z.object({ name: z.string() }) }),
  z.object({ type: z.literal("team-renamed"), data: z.object({ before: z.string(), after: z.string() }) }),
  z.object({ type: z.literal("team-deleted"), data: z.object({ name: z.string() }) }),
  z.object({ type: z.literal("team-restored"), data: z.object({ name: z.string() }) }),
  z.object({ type: z.literal("link-days-set"), data: z.object({ before: z.number(), after: z.number() }) }),
  z.object({ type: z.literal("invited"), data: z.object({ email: z.string(), role: z.string() }) }),
  z.object({ type: z.literal("invitation-withdrawn"), data: z.object({ email: z.string() }) }),
  z.object({ type: z.literal("joined"), data: z.object({ name: z.string(), role: z.string() }) }),
  z.object({
    type: z.literal("role-changed"),
    data: z.object({ name: z.string(), before: z.string(), after: z.string() }),
  }),
  z.object({ type: z.literal("person-removed"), data: z.object({ name: z.string(), role: z.string() }) }),
  z.object({ type: z.literal("person-left"), data: z.object({ name: z.string(), role: z.string() }) }),
  z.object({ type: z.literal("sessions-ended"), data: z.object({ count: z.number() }) }),
  z.object({ type: z.literal("address-change-asked"), data: z.object({}) }),
  z.object({ type: z.literal("address-changed"), data: z.object({}) }),
  z.object({ type: z.literal("address-confirmed"), data: z.object({}) }),
  z.object({ type: z.literal("account-deleted"), data: z.object({}) }),
  z.object({ type: z.literal("account-restored"), data: z.object({}) }),
  z.object({
    type: z.literal("token-made"),
    data: z.object({
      prefix: z.string(),
      name: z.string(),
      scope: z.string(),
      endsAt: z.string().nullable(),
    }),
  }),
  z.object({ type: z.literal("token-revoked"), data: z.object({ prefix: z.string(), name: z.string() }) }),
  z.object({ type: z.literal("series-made"), data: z.object({ name: z.string() }) }),
  z.object({
    type: z.literal("intake"),
    data: z.object({
      name: z.string(),
      files: z.array(z.object({ name: z.string(), sha256: z.string(), bytes: z.number() })),
      answers,
      questions: z.number(),
      ...counts,
    }),
  }),
  z.object({
    type: z.literal("batch"),
    data: z.object({
      /** From 1; the first upload is 1. */
      batch: z.number(),
      name: z.string().nullable(),
      files: z.array(z.object({ name: z.string(), sha256: z.string(), bytes: z.number() })),
      answers,
      added: z.object(counts),
    }),
  }),
  z.object({
    type: z.literal("reread"),
    data: z.object({ before: answers, after: answers, questions: z.number(), ...counts }),
  }),
  z.object({
    type: z.literal("answer"),
    data: z.object({
      question: z.string(),
      text: z.string(),
      option: z.string(),
      optionText: z.string(),
      released: z.number(),
    }),
  }),
  z.object({ type: z.literal("hold"), data: z.object({ frame: z.number(), reason: z.string() }) }),
  z.object({
    type: z.literal("split-off"),
    data: splitFrames,
  }),
  z.object({
    type: z.literal("split-from"),
    data: splitFrames,
  }),
  z.object({
    type: z.literal("release"),
    data: z.object({ frame: z.number(), reason: z.string(), heldFor: z.string() }),
  }),
  z.object({
    type: z.literal("release-refused"),
    data: z.object({ frame: z.number(), reason: z.string(), why: z.string() }),
  }),
  z.object({
    type: z.literal("sift"),
    data: z.object({
      siftId: z.string(),
      automatic: z.boolean(),
      /** A set computed before became the ensemble's own again. */
      back: z.boolean().optional(),
      recipe: z.unknown(),
    }),
  }),
  z.object({ type: z.literal("sift-cancelled"), data: z.object({ siftId: z.string() }) }),
  z.object({ type: z.literal("export"), data: z.object({ siftId: z.string(), format: z.string() }) }),
  z.object({
    type: z.literal("source-downloaded"),
    data: z.object({ file: z.string() }),
  }),
  z.object({
    type: z.literal("columns-added"),
    data: z.object({
      /** File that they came from, or what they were computed from. */
      from: z.string(),
      sha256: z.string().nullable(),
      columns: z.array(
        z.object({
          id: z.string(),
          name: z.string(),
          kind: z.enum(["energy", "property"]),
          unit: z.string().nullable(),
          count: z.number(),
          replaced: z.boolean(),
        }),
      ),
      /** How rows or frames were matched, in words. */
      matched: z.string(),
      answers: z.record(z.string(), z.string()),
    }),
  }),
  z.object({
    type: z.literal("column-changed"),
    data: z.object({
      id: z.string(),
      name: z.string(),
      changes: z.array(
        z.object({ what: z.string(), before: z.string().nullable(), after: z.string().nullable() }),
      ),
    }),
  }),
  z.object({
    type: z.literal("atoms-split"),
    /** Names of the atoms, a list a part. */
    data: z.object({ parts: z.array(z.array(z.string())) }),
  }),
  z.object({
    type: z.literal("atoms-joined"),
    data: z.object({ parts: z.array(z.array(z.string())) }),
  }),
  z.object({
    type: z.literal("measured-kept"),
    data: z.object({
      quantity: z.string(),
      unit: z.string().nullable(),
      /** Values that are kept now. */
      count: z.number(),
      changes: z.array(
        z.object({ what: z.string(), before: z.string().nullable(), after: z.string().nullable() }),
      ),
      /** Changes beyond those listed. */
      more: z.number(),
    }),
  }),
  z.object({ type: z.literal("column-removed"), data: z.object({ id: z.string(), name: z.string() }) }),
  z.object({
    type: z.literal("plan-saved"),
    data: z.object({ id: z.string(), name: z.string(), version: z.number() }),
  }),
  z.object({ type: z.literal("plan-removed"), data: z.object({ id: z.string(), name: z.string() }) }),
  z.object({ type: z.literal("plan-restored"), data: z.object({ id: z.string(), name: z.string() }) }),
  z.object({ type: z.literal("column-restored"), data: z.object({ id: z.string(), name: z.string() }) }),
  z.object({
    type: z.literal("edition-frozen"),
    data: z.object({ number: z.number(), title: z.string(), conformers: z.number(), sha256: z.string() }),
  }),
  z.object({
    type: z.literal("edition-verified"),
    data: z.object({ number: z.number(), same: z.boolean(), files: z.number(), agree: z.number() }),
  }),
  z.object({ type: z.literal("edition-exported"), data: z.object({ number: z.number(), file: z.string() }) }),
  z.object({
    type: z.literal("link-made"),
    data: z.object({
      number: z.number(),
      prefix: z.string(),
      label: z.string(),
      endsAt: z.string(),
      sources: z.boolean(),
      logbook: z.boolean(),
      /** Sent to somebody by letter; to whom is not kept. */
      mailed: z.boolean().optional(),
    }),
  }),
  z.object({
    type: z.literal("link-opened"),
    data: z.object({ number: z.number(), prefix: z.string(), label: z.string(), opened: z.number() }),
  }),
  z.object({
    /** The first time that day that a link gave that file out. */
    type: z.literal("link-exported"),
    data: z.object({
      linkId: z.string(),
      number: z.number(),
      prefix: z.string(),
      label: z.string(),
      /** Name of the file; one of the edition, or an original one. */
      file: z.string(),
      source: z.boolean(),
    }),
  }),
  z.object({
    type: z.literal("link-ended"),
    data: z.object({ number: z.number(), prefix: z.string(), label: z.string() }),
  }),
  z.object({ type: z.literal("remark"), data: z.object({ text: z.string() }) }),
  z.object({ type: z.literal("renamed"), data: z.object({ before: z.string(), after: z.string() }) }),
  z.object({
    type: z.literal("moved"),
    data: z.object({ before: z.string(), after: z.string() }),
  }),
  z.object({ type: z.literal("deleted"), data: z.object({ name: z.string() }) }),
  z.object({ type: z.literal("restored"), data: z.object({ name: z.string() }) }),
  z.object({ type: z.literal("outside-added"), data: z.object({ name: z.string(), file: z.string() }) }),
  z.object({ type: z.literal("outside-removed"), data: z.object({ name: z.string() }) }),
  z.object({ type: z.literal("outside-restored"), data: z.object({ name: z.string() }) }),
  z.object({
    type: z.literal("pair-matrix"),
    data: z.object({ conformers: z.number(), atoms: z.string() }),
  }),
]);

export type LogbookEntry = z.infer<typeof logbookEntrySchema>;
export type LogbookType = LogbookEntry["type"];

const NONE = "open";

const withArticle = (role: string) => `${/^[aeiou]/.test(role) ? "an" : "a"} ${role}`;

function answerWords(a: z.infer<typeof answers>): string {
  return `level ${a.level ?? NONE}, unit ${a.energyUnit ?? NONE}, energy from ${a.energyFrom ?? NONE}`;
}

function countWords(d: { frames: number; accepted: number; remarked: number; held: number }): string {
  const remarked = d.remarked > 0 ? `, ${formatCount(d.remarked)} of them with a remark` : "";
  return `${plural(d.frames, "frame")}: ${formatCount(d.accepted)} accepted${remarked}, ${formatCount(d.held)} held`;
}

function changeWords(
  changes: readonly { what: string; before: string | null; after: string | null }[],
): string {
  return changes
    .map(({ what, before, after }) => `${what}: ${after ?? "none"} (before: ${before ?? "none"})`)
    .join("; ");
}

/** "H10, H11 and H12". */
const partWords = (parts: readonly (readonly string[])[], between: string) =>
  parts.map((part) => part.join(", ")).join(between);

/**
 * One sentence on an entry, and a second line where there is more to say.
 *
 * @example describeEntry({ type: "hold", data: { frame: 4, reason: "no minimum" } }).text // "Held frame 4"
 */
export function describeEntry(entry: LogbookEntry): { text: string; detail: string | null } {
  switch (entry.type) {
    case "sign-up":
      return { text: "Signed up", detail: null };
    case "sign-in":
      return { text: "Signed in", detail: null };
    case "sign-in-failed":
      return { text: "A sign-in was refused", detail: null };
    case "sign-out":
      return { text: "Signed out", detail: null };
    case "password-reset-asked":
      return { text: "Asked for a password reset", detail: null };
    case "password-changed":
      return { text: "Changed the password", detail: null };
    case "team-made":
      return { text: `Made the team ${entry.data.name}`, detail: null };
    case "team-renamed":
      return { text: `Renamed the team to ${entry.data.after}`, detail: `before: ${entry.data.before}` };
    case "team-deleted":
      return { text: `Deleted the team ${entry.data.name}`, detail: "It can be brought back for 30 days." };
    case "team-restored":
      return { text: `Brought the team ${entry.data.name} back`, detail: null };
    case "link-days-set":
      return {
        text: `Set the longest life of a link to ${plural(entry.data.after, "day")}`,
        detail: `before: ${plural(entry.data.before, "day")}`,
      };
    case "invited":
      return { text: `Invited ${entry.data.email} as ${entry.data.role}`, detail: null };
    case "invitation-withdrawn":
      return { text: `Withdrew the invitation of ${entry.data.email}`, detail: null };
    case "joined":
      return { text: `${entry.data.name} joined the team as ${entry.data.role}`, detail: null };
    case "role-changed":
      return {
        text: `Made ${entry.data.name} ${withArticle(entry.data.after)}`,
        detail: `before: ${entry.data.before}`,
      };
    case "person-removed":
      return { text: `Removed ${entry.data.name} from the team`, detail: `before: ${entry.data.role}` };
    case "person-left":
      return { text: "Left the team", detail: `before: ${entry.data.role}` };
    case "sessions-ended":
      return { text: `Ended ${plural(entry.data.count, "session")}`, detail: null };
    case "address-change-asked":
      return { text: "Asked for another address", detail: null };
    case "address-changed":
      return { text: "Changed the address", detail: null };
    case "address-confirmed":
      return { text: "Confirmed the address", detail: null };
    case "account-deleted":
      return { text: "Deleted the account", detail: "It can be brought back for 30 days." };
    case "account-restored":
      return { text: "Brought the account back", detail: null };
    case "token-made": {
      const end = entry.data.endsAt === null ? "no end date" : `ends ${entry.data.endsAt.slice(0, 10)}`;
      return {
        text: `Made token ${entry.data.prefix}…`,
        detail: `${entry.data.name}; ${entry.data.scope}; ${end}`,
      };
    }
    case "token-revoked":
      return { text: `Revoked token ${entry.data.prefix}…`, detail: entry.data.name };
    case "series-made":
      return { text: `Made the series ${entry.data.name}`, detail: null };
    case "intake": {
      const names = entry.data.files.map((file) => file.name).join(", ");
      const open = entry.data.questions > 0 ? `; ${plural(entry.data.questions, "question")} open` : "";
      return { text: `Read ${names}`, detail: countWords(entry.data) + open };
    }
    case "batch":
      return {
        text: `Added ${entry.data.name ?? `batch ${entry.data.batch}`}: ${countWords(entry.data.added)}`,
        detail: `${entry.data.files.map((file) => file.name).join(", ")}; ${answerWords(entry.data.answers)}`,
      };
    case "reread":
      return {
        text: `Read the files again with other answers: ${answerWords(entry.data.after)}`,
        detail: `before: ${answerWords(entry.data.before)}; ${countWords(entry.data)}`,
      };
    case "answer":
      return {
        text: `Answered: ${entry.data.optionText}`,
        detail: `${entry.data.text}${entry.data.released > 0 ? ` ${plural(entry.data.released, "frame")} released.` : ""}`,
      };
    case "split-off":
      return {
        text: `Made an ensemble of ${plural(entry.data.count, "held frame")}: ${entry.data.name}`,
        detail: framesWords(entry.data.frames),
      };
    case "split-from":
      return {
        text: `Made of ${plural(entry.data.count, "held frame")} of ${entry.data.name}`,
        detail: `there ${framesWords(entry.data.frames).toLowerCase()}`,
      };
    case "hold":
      return { text: `Held frame ${entry.data.frame}`, detail: entry.data.reason };
    case "release":
      return { text: `Released frame ${entry.data.frame}`, detail: entry.data.reason };
    case "release-refused":
      return { text: `Asked to release frame ${entry.data.frame}; refused`, detail: entry.data.why };
    case "sift":
      return {
        text: siftWords(entry.data),
        detail: recipeWords(entry.data.recipe),
      };
    case "sift-cancelled":
      return { text: "Cancelled a sift", detail: null };
    case "export":
      return {
        text:
          entry.data.format === "averages csv"
            ? "Took the averages as CSV"
            : entry.data.format === "outside csv"
              ? "Took the comparison with outside structures as CSV"
              : `Took the distinct set as ${entry.data.format.toUpperCase()}`,
        detail: null,
      };
    case "source-downloaded":
      return { text: `Downloaded the source file ${entry.data.file}`, detail: null };
    case "columns-added": {
      const names = entry.data.columns.map(({ name, unit }) => (unit === null ? name : `${name} [${unit}]`));
      const verb = entry.data.columns.some(({ replaced }) => replaced) ? "Replaced numbers of" : "Added";
      return {
        text: `${verb} ${names.join(", ")}`,
        detail: `from ${entry.data.from}; ${entry.data.matched}`,
      };
    }
    case "column-changed":
      return {
        text: `Changed the column ${entry.data.name}`,
        detail: changeWords(entry.data.changes),
      };
    case "atoms-split":
      return {
        text: `Took equivalent atoms apart: ${partWords(entry.data.parts, " and ")}`,
        detail: "Each part is a signal of its own in averages.",
      };
    case "atoms-joined":
      return {
        text: `Put equivalent atoms together again: ${partWords(entry.data.parts, " with ")}`,
        detail: null,
      };
    case "measured-kept": {
      const { quantity, unit, count, changes, more } = entry.data;
      const told = changeWords(changes);
      return {
        text:
          count === 0
            ? `Took the measured values of ${quantity} away`
            : `Kept ${plural(count, "measured value")} of ${quantity}${unit === null ? "" : `, ${unit}`}`,
        detail: more > 0 ? `${told}; and ${plural(more, "further change")}` : told,
      };
    }
    case "column-removed":
      return { text: `Removed the column ${entry.data.name}`, detail: null };
    case "plan-saved":
      return {
        text: `Saved the plan ${entry.data.name}`,
        detail: entry.data.version > 1 ? `version ${entry.data.version}` : null,
      };
    case "plan-removed":
      return { text: `Removed the plan ${entry.data.name}`, detail: null };
    case "plan-restored":
      return { text: `Brought the plan ${entry.data.name} back`, detail: null };
    case "column-restored":
      return { text: `Brought the column ${entry.data.name} back`, detail: null };
    case "edition-frozen":
    case "edition-verified":
    case "edition-exported":
    case "link-made":
    case "link-opened":
    case "link-exported":
    case "link-ended":
      return handOverWords(entry);
    case "remark":
      return { text: `“${entry.data.text}”`, detail: null };
    case "renamed":
      return { text: `Renamed to ${entry.data.after}`, detail: `before: ${entry.data.before}` };
    case "moved":
      return { text: `Moved to the series ${entry.data.after}`, detail: `before: ${entry.data.before}` };
    case "deleted":
      return { text: `Deleted ${entry.data.name}`, detail: null };
    case "outside-added":
      return { text: `Laid the outside structure ${entry.data.name} beside it`, detail: entry.data.file };
    case "outside-removed":
      return { text: `Took the outside structure ${entry.data.name} away`, detail: null };
    case "outside-restored":
      return { text: `Brought the outside structure ${entry.data.name} back`, detail: null };
    case "pair-matrix":
      return {
        text: `Asked for the distances of all pairs of ${plural(entry.data.conformers, "frame")}`,
        detail: entry.data.atoms,
      };
    case "restored":
      return { text: `Brought ${entry.data.name} back`, detail: null };
  }
}

type HandOverEntry = Extract<
  LogbookEntry,
  { type: `edition-${string}` | `link-${"made" | "opened" | "exported" | "ended"}` }
>;

const forWhom = (label: string) => (label === "" ? "" : ` for ${label}`);

function handOverWords(entry: HandOverEntry): { text: string; detail: string | null } {
  switch (entry.type) {
    case "edition-frozen": {
      const { number, title, conformers, sha256 } = entry.data;
      return {
        text: `Froze edition ${number}${title === "" ? "" : `, “${title}”`}`,
        detail: `${plural(conformers, "conformer")}; SHA-256 ${formatChecksum(sha256)}`,
      };
    }
    case "edition-verified": {
      const { number, same, agree, files } = entry.data;
      const counted = `${agree} of ${plural(files, "file")}`;
      return same
        ? { text: `Recomputed edition ${number} and verified it: ${counted}, the same bytes`, detail: null }
        : { text: `Recomputed edition ${number}: it differs`, detail: `${counted} agree` };
    }
    case "edition-exported":
      return { text: `Took ${entry.data.file} of edition ${entry.data.number}`, detail: null };
    case "link-made": {
      const { number, label, endsAt, sources, logbook, mailed } = entry.data;
      const parts = [
        `ends ${formatDate(endsAt)}`,
        sources ? "with source files" : "without source files",
        logbook ? "with part of the logbook" : null,
        mailed ? "sent by letter" : null,
      ];
      return {
        text: `Made a link to edition ${number}${forWhom(label)}`,
        detail: parts.filter((part) => part !== null).join(", "),
      };
    }
    case "link-opened": {
      const { number, opened } = entry.data;
      return {
        text: `Opened edition ${number}`,
        detail: opened === 1 ? "for the first time" : `${plural(opened, "time")} so far`,
      };
    }
    case "link-exported": {
      const { file, source, number } = entry.data;
      return {
        text: `Took ${source ? "the source file " : ""}${file} of edition ${number}`,
        detail: "for the first time that day",
      };
    }
    case "link-ended":
      return {
        text: `Ended the link to edition ${entry.data.number}${forWhom(entry.data.label)}`,
        detail: null,
      };
  }
}

const recipeShape = z.object({
  levelName: z.string().nullable(),
  window: z.number().nullable(),
  energyTolerance: z.number().nullable(),
  rmsdTolerance: z.number(),
  atoms: z.string(),
  mirror: z.string(),
});

/** The recipe in one line; what an older version wrote in another shape is left out, not guessed. */
function siftWords({ automatic, back, recipe }: { automatic: boolean; back?: boolean; recipe?: unknown }) {
  if (automatic) return "Sift begun after intake";
  if (back !== true) return "Asked for a sift";
  const read = recipeShape.safeParse(recipe);
  return read.success
    ? `Went back to the set at ${withUnit(fixed(read.data.rmsdTolerance, 3), "Å")}`
    : "Went back to an earlier set";
}

function recipeWords(recipe: unknown): string | null {
  const read = recipeShape.safeParse(recipe);
  if (!read.success) return null;
  const r = read.data;
  const parts = [
    r.levelName === null ? "without energies" : `level ${r.levelName}`,
    `RMSD ${withUnit(fixed(r.rmsdTolerance, 3), "Å")}`,
    r.energyTolerance === null
      ? "no energy tolerance"
      : `energy ${withUnit(formatEnergy(r.energyTolerance), "kcal/mol")}`,
    r.window === null ? "no window" : `window ${withUnit(formatEnergy(r.window), "kcal/mol")}`,
    { heavy: "heavy atoms", "heavy+polarH": "heavy atoms and polar hydrogens", all: "all atoms" }[r.atoms] ??
      r.atoms,
    r.mirror === "merge" ? "mirror images merged" : "mirror images kept apart",
  ];
  return parts.join(", ");
}
