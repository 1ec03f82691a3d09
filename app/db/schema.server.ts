import {
  bigint,
  boolean,
  double,
  index,
  int,
  mysqlTable,
  primaryKey,
  text,
  tinyint,
  uniqueIndex,
  varchar,
} from "drizzle-orm/mysql-core";
import { z } from "zod";
import { siftRecipeSchema } from "../lib/recipe/recipe.ts";
import {
  bytesColumn,
  idColumn,
  jsonColumn,
  longTextColumn,
  sha256Column,
  timeColumn,
} from "./columns.server.ts";

const anyJson = jsonColumn(z.unknown());

/** The answers that count when the same bytes come again: as written, `null` where none was given. */
export const answersSchema = z.object({
  energyUnit: z.string().nullable(),
  energyFrom: z.string().nullable(),
  level: z.string().nullable(),
  energyKind: z.enum(["electronic", "zero-point", "enthalpy", "free"]).default("electronic"),
  energyTemperature: z.number().nullable().default(null),
});

/** Populations of a distinct set at 298.15 K; `shares` in falling order, the rest in the last. */
export const siftSummarySchema = z.object({
  shares: z.array(z.number()),
  lowest: z.number().nullable(),
  effectiveCount: z.number().nullable(),
});

// --- people -----------------------------------------------------------------------------------

export const users = mysqlTable(
  "users",
  {
    id: idColumn().primaryKey(),
    email: varchar({ length: 254 }).notNull(),
    name: varchar({ length: 120 }).notNull(),
    passwordHash: varchar({ length: 255 }).notNull(),
    demo: boolean().notNull().default(false),
    createdAt: timeColumn().notNull(),
    disabledAt: timeColumn(),
  },
  (t) => [uniqueIndex("users_email").on(t.email)],
);

export const sessions = mysqlTable(
  "sessions",
  {
    id: idColumn().primaryKey(),
    tokenSha: sha256Column().notNull(),
    userId: idColumn()
      .notNull()
      .references(() => users.id, { onDelete: "cascade" }),
    createdAt: timeColumn().notNull(),
    seenAt: timeColumn().notNull(),
    /** Absolute end; the idle end is counted from `seenAt`. */
    endsAt: timeColumn().notNull(),
    stay: boolean().notNull().default(false),
    userAgent: varchar({ length: 255 }),
  },
  (t) => [uniqueIndex("sessions_token").on(t.tokenSha), index("sessions_user").on(t.userId)],
);

/** Single-use secrets sent by mail: password reset, confirmation of an address. */
export const mailTokens = mysqlTable(
  "mail_tokens",
  {
    tokenSha: sha256Column().primaryKey(),
    userId: idColumn()
      .notNull()
      .references(() => users.id, { onDelete: "cascade" }),
    purpose: varchar({ length: 20 }).notNull(),
    createdAt: timeColumn().notNull(),
    endsAt: timeColumn().notNull(),
    usedAt: timeColumn(),
  },
  (t) => [index("mail_tokens_user").on(t.userId)],
);

export const teams = mysqlTable("teams", {
  id: idColumn().primaryKey(),
  name: varchar({ length: 120 }).notNull(),
  demo: boolean().notNull().default(false),
  createdAt: timeColumn().notNull(),
});

export const members = mysqlTable(
  "members",
  {
    teamId: idColumn()
      .notNull()
      .references(() => teams.id, { onDelete: "cascade" }),
    userId: idColumn()
      .notNull()
      .references(() => users.id, { onDelete: "cascade" }),
    role: varchar({ length: 10, enum: ["owner", "analyst", "reader"] }).notNull(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [primaryKey({ columns: [t.teamId, t.userId] }), index("members_user").on(t.userId)],
);

export const apiTokens = mysqlTable(
  "api_tokens",
  {
    id: idColumn().primaryKey(),
    teamId: idColumn()
      .notNull()
      .references(() => teams.id, { onDelete: "cascade" }),
    userId: idColumn()
      .notNull()
      .references(() => users.id, { onDelete: "cascade" }),
    name: varchar({ length: 120 }).notNull(),
    /** First characters of the token, for recognition. */
    prefix: varchar({ length: 16 }).notNull(),
    tokenSha: sha256Column().notNull(),
    scope: varchar({ length: 4, enum: ["full", "read", "add"] }).notNull(),
    createdAt: timeColumn().notNull(),
    endsAt: timeColumn(),
    usedAt: timeColumn(),
    revokedAt: timeColumn(),
  },
  (t) => [uniqueIndex("api_tokens_token").on(t.tokenSha), index("api_tokens_team").on(t.teamId)],
);

/** Counters of refused and made attempts, in the database so that several processes count together. */
export const throttles = mysqlTable("throttles", {
  name: varchar({ length: 191 }).primaryKey(),
  count: int().notNull(),
  windowStart: timeColumn().notNull(),
});

// --- ensembles --------------------------------------------------------------------------------

export const series = mysqlTable(
  "series",
  {
    id: idColumn().primaryKey(),
    teamId: idColumn()
      .notNull()
      .references(() => teams.id, { onDelete: "cascade" }),
    name: varchar({ length: 120 }).notNull(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [uniqueIndex("series_name").on(t.teamId, t.name)],
);

/** Original bytes of one file, kept once a team under their SHA-256. Chunks hold them compressed. */
export const sources = mysqlTable(
  "sources",
  {
    id: idColumn().primaryKey(),
    teamId: idColumn()
      .notNull()
      .references(() => teams.id, { onDelete: "cascade" }),
    /** Null while the upload is in flight, so that an unfinished one never answers for its bytes. */
    sha256: sha256Column(),
    bytes: bigint({ mode: "number" }).notNull(),
    chunks: int().notNull(),
    /** While in flight moved on with every chunk, then the time of arrival. */
    createdAt: timeColumn().notNull(),
  },
  (t) => [uniqueIndex("sources_sha").on(t.teamId, t.sha256)],
);

export const sourceChunks = mysqlTable(
  "source_chunks",
  {
    sourceId: idColumn()
      .notNull()
      .references(() => sources.id, { onDelete: "cascade" }),
    position: int().notNull(),
    /** zlib-deflated piece of the original bytes. */
    data: bytesColumn().notNull(),
  },
  (t) => [primaryKey({ columns: [t.sourceId, t.position] })],
);

export const ensembles = mysqlTable(
  "ensembles",
  {
    id: idColumn().primaryKey(),
    teamId: idColumn()
      .notNull()
      .references(() => teams.id, { onDelete: "cascade" }),
    /** Null only while the files are still being read: the series may be named after them. */
    seriesId: idColumn().references(() => series.id),
    name: varchar({ length: 200 }).notNull(),
    /** SHA-256 over the checksums of the first upload's files in order; null once deleted, so that it frees its place. */
    filesSha: sha256Column(),
    answers: jsonColumn(answersSchema)().notNull(),
    /** Nobody needs an account to read it: the live example. */
    example: boolean().notNull().default(false),
    formula: varchar({ length: 120 }).notNull(),
    atoms: int().notNull(),
    /** Atomic number per atom, one byte each, then mass numbers as little-endian uint16. */
    elements: bytesColumn().notNull(),
    /** Bonds of the group as little-endian int32 pairs. */
    bonds: bytesColumn().notNull(),
    /** Labels of the atoms as the file writes them, where they differ from the element. */
    atomLabels: anyJson(),
    /** Charge, multiplicity and configuration of the group: what a further batch is compared with. */
    identity: anyJson(),
    chirality: varchar({ length: 10, enum: ["achiral", "chiral", "unsure"] }).notNull(),
    /** Words on how the chirality was decided, tested centres and the like. */
    chiralityNote: varchar({ length: 500 }).notNull().default(""),
    frames: int().notNull(),
    accepted: int().notNull(),
    remarked: int().notNull(),
    held: int().notNull(),
    openQuestions: int().notNull(),
    /** SHA-256 over coordinates, elements and bonds of the accepted frames with their numbers; moves with holds and releases. */
    acceptedSha: sha256Column().notNull(),
    readerVersion: varchar({ length: 20 }).notNull(),
    createdBy: idColumn().references(() => users.id, { onDelete: "set null" }),
    /** Token that brought it in; one narrowed to adding sees only its own. */
    createdByToken: idColumn(),
    version: int().notNull().default(1),
    createdAt: timeColumn().notNull(),
    changedAt: timeColumn().notNull(),
    /** Set too while the files are still being read, so that no reader sees a half ensemble. */
    deletedAt: timeColumn(),
    /** Last sign of life of the upload that fills this row; null once it stands. What stays behind is swept. */
    readingSince: timeColumn(),
  },
  (t) => [
    uniqueIndex("ensembles_files").on(t.teamId, t.filesSha),
    index("ensembles_team").on(t.teamId, t.createdAt),
    index("ensembles_series").on(t.seriesId),
  ],
);

export const ensembleFiles = mysqlTable(
  "ensemble_files",
  {
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    /** Counts the files of the ensemble from 0, on through all batches. */
    position: int().notNull(),
    /** Which upload brought it: 0 the first, then one more for each further batch or search. */
    batch: int().notNull(),
    sourceId: idColumn()
      .notNull()
      .references(() => sources.id),
    name: varchar({ length: 255 }).notNull(),
    format: varchar({ length: 20 }).notNull(),
    firstFrame: int().notNull(),
    frames: int().notNull(),
  },
  (t) => [primaryKey({ columns: [t.ensembleId, t.position] }), index("ensemble_files_source").on(t.sourceId)],
);

/**
 * Coordinates as packed little-endian doubles [frame][atom][xyz], in blocks of about 1 MB.
 * A shape is one sequence of elements; the ensemble's own molecule is shape 0, frames of others keep theirs.
 */
export const frameBlocks = mysqlTable(
  "frame_blocks",
  {
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    shape: int().notNull(),
    /** Index of the first frame within its shape, from 0. */
    first: int().notNull(),
    count: int().notNull(),
    data: bytesColumn().notNull(),
    sha256: sha256Column().notNull(),
  },
  (t) => [primaryKey({ columns: [t.ensembleId, t.shape, t.first] })],
);

export const frames = mysqlTable(
  "frames",
  {
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    /** From 1, in file order, on through all files. */
    number: int().notNull(),
    file: int().notNull(),
    line: int().notNull(),
    /** Null where the frame could not be read. */
    shape: int(),
    indexInShape: int(),
    label: varchar({ length: 200 }),
    /** Comment line as read, the source of its numbers; cut at 64 kB. */
    comment: text().notNull(),
    state: varchar({ length: 8, enum: ["accepted", "remarked", "held"] }).notNull(),
    /** What the reader and the classifier say, before anybody decides otherwise. */
    readState: varchar({ length: 8, enum: ["accepted", "remarked", "held"] }).notNull(),
    /** HoldReason while held. */
    holdReason: varchar({ length: 24 }),
    /** Words of the hold, or of the remark. */
    note: varchar({ length: 1000 }),
  },
  (t) => [primaryKey({ columns: [t.ensembleId, t.number] })],
);

export const intakeMessages = mysqlTable(
  "intake_messages",
  {
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    position: int().notNull(),
    code: varchar({ length: 8 }).notNull(),
    severity: varchar({ length: 8, enum: ["remark", "hold", "question", "reject"] }).notNull(),
    file: varchar({ length: 255 }).notNull(),
    line: int(),
    column: int(),
    frame: int(),
    atom: int(),
    found: varchar({ length: 400 }),
    message: varchar({ length: 1000 }).notNull(),
    hint: varchar({ length: 500 }),
  },
  (t) => [primaryKey({ columns: [t.ensembleId, t.position] })],
);

export const questions = mysqlTable(
  "questions",
  {
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    /** "energy-from", "energy-unit", "level": unique in the ensemble. */
    id: varchar({ length: 40 }).notNull(),
    position: int().notNull(),
    code: varchar({ length: 40 }).notNull(),
    text: varchar({ length: 500 }).notNull(),
    reason: varchar({ length: 500 }),
    options: anyJson().notNull(),
    answered: varchar({ length: 200 }),
    answeredBy: idColumn(),
    answeredAt: timeColumn(),
  },
  (t) => [primaryKey({ columns: [t.ensembleId, t.id] })],
);

/** One quantity over the frames. Energy columns are the levels of theory. */
export const columns = mysqlTable(
  "columns",
  {
    id: idColumn().primaryKey(),
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    name: varchar({ length: 120 }).notNull(),
    kind: varchar({ length: 10, enum: ["energy", "property"] }).notNull(),
    /** Order of arrival among the levels: fixes hue and marker for good. */
    ordinal: int().notNull(),
    energyKind: varchar({ length: 12, enum: ["electronic", "zero-point", "enthalpy", "free"] }),
    temperature: double(),
    unit: varchar({ length: 40 }),
    rule: varchar({ length: 10 }),
    /** Where the numbers come from: "key:energy", "number:3", a file name. */
    origin: varchar({ length: 200 }),
    /** Frames with a value, accepted or not. */
    count: int().notNull(),
    /** Little-endian doubles by frame number, 0 where missing, then presence bits (frame 1 is bit 0 of byte 0). */
    data: bytesColumn().notNull(),
    /** SHA-256 of `data`: tells without reading it whether a sift ran on these numbers. */
    dataSha: sha256Column().notNull(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [uniqueIndex("columns_name").on(t.ensembleId, t.name)],
);

// --- computation ------------------------------------------------------------------------------

export const jobs = mysqlTable(
  "jobs",
  {
    id: idColumn().primaryKey(),
    definition: varchar({ length: 40 }).notNull(),
    version: int().notNull(),
    teamId: idColumn()
      .notNull()
      .references(() => teams.id, { onDelete: "cascade" }),
    userId: idColumn(),
    payload: anyJson().notNull(),
    state: varchar({ length: 10, enum: ["queued", "running", "done", "failed", "cancelled"] }).notNull(),
    progress: double().notNull().default(0),
    attempts: tinyint().notNull().default(0),
    /** Who holds it: a random id of the process. */
    holder: varchar({ length: 40 }),
    leaseUntil: timeColumn(),
    error: varchar({ length: 500 }),
    createdAt: timeColumn().notNull(),
    startedAt: timeColumn(),
    finishedAt: timeColumn(),
  },
  (t) => [index("jobs_state").on(t.state, t.createdAt)],
);

export const sifts = mysqlTable(
  "sifts",
  {
    id: idColumn().primaryKey(),
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    recipeSha: sha256Column().notNull(),
    /** Checksum of the accepted frames and the level's energies that it ran on. */
    inputSha: sha256Column().notNull(),
    recipe: jsonColumn(siftRecipeSchema)().notNull(),
    jobId: idColumn().notNull(),
    keptCount: int(),
    /** SiftResult as JSON text, written once when done. */
    result: longTextColumn(),
    /** What tables of ensembles show of the result, so that they need not read it. */
    summary: jsonColumn(siftSummarySchema)(),
    codeVersion: varchar({ length: 40 }),
    createdBy: idColumn(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [
    uniqueIndex("sifts_same").on(t.ensembleId, t.recipeSha, t.inputSha),
    index("sifts_ensemble").on(t.ensembleId, t.createdAt),
  ],
);

// --- record -----------------------------------------------------------------------------------

/** Append-only: triggers refuse update and delete. */
export const logbook = mysqlTable(
  "logbook",
  {
    id: bigint({ mode: "number" }).autoincrement().primaryKey(),
    teamId: idColumn(),
    ensembleId: idColumn(),
    userId: idColumn(),
    tokenId: idColumn(),
    type: varchar({ length: 40 }).notNull(),
    data: anyJson().notNull(),
    /** Address of the caller as the trusted proxy setting gives it. */
    origin: varchar({ length: 64 }),
    createdAt: timeColumn().notNull(),
  },
  (t) => [index("logbook_team").on(t.teamId, t.id), index("logbook_ensemble").on(t.ensembleId, t.id)],
);

/** Messages to send; the queue retries, a failure never fails the act that made it. */
export const mailQueue = mysqlTable(
  "mail_queue",
  {
    id: idColumn().primaryKey(),
    recipient: varchar({ length: 254 }).notNull(),
    subject: varchar({ length: 200 }).notNull(),
    body: text().notNull(),
    attempts: tinyint().notNull().default(0),
    nextTryAt: timeColumn().notNull(),
    sentAt: timeColumn(),
    failedAt: timeColumn(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [index("mail_queue_due").on(t.sentAt, t.nextTryAt)],
);
