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
import { averagingSchema } from "../lib/averages/averaging.ts";
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
  /** True where the kind was stated, electronic too; absent is not. */
  kindStated: z.boolean().optional(),
  /** How the files are to be read where they leave it open: the option by the id of its question. */
  reading: z.record(z.string(), z.string()).optional(),
});

/** Orders per bond (in the order of the ensemble's bonds), charge and unpaired electrons per atom. */
export const bondTableSchema = z.object({
  origin: z.enum(["file", "smiles"]),
  orders: z.array(z.number()),
  charges: z.array(z.number()),
  radicals: z.array(z.number()),
});

export const frameFieldsSchema = z.array(z.tuple([z.string(), z.string()]));
export const frameMappingSchema = z.array(z.number().int());

/** How a column came to be, where it was not read from a file. */
export const columnDefinitionSchema = z.discriminatedUnion("type", [
  /** A formula over columns of the ensemble; `inputs` maps the names in `text` to column ids. */
  z.object({
    type: z.literal("expression"),
    text: z.string(),
    inputs: z.array(z.object({ name: z.string(), column: z.string() })),
  }),
  /** Measured on the structures: atoms from 1; several pairs where equivalent atoms are averaged together. */
  z.object({
    type: z.literal("observable"),
    observable: z.enum(["distance", "angle", "torsion", "coupling"]),
    atoms: z.array(z.array(z.number().int())),
    parameters: z.record(z.string(), z.union([z.number(), z.string()])),
  }),
]);

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
    /** Asked to be deleted: no sign-in from then on, undone within 30 days, then purged. */
    deletedAt: timeColumn(),
    /** When a letter to the address was answered; null until then. The account works without. */
    confirmedAt: timeColumn(),
    /** Which letters beside those of safety the person wants. */
    jobLetters: boolean().notNull().default(true),
    linkLetters: boolean().notNull().default(true),
    digest: boolean().notNull().default(false),
    /** When the last week was told of, or the digest was asked for. */
    digestAt: timeColumn(),
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
    /** What the act is about: the new address of a change of address. */
    data: anyJson(),
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
  /** Longest life of a read-only link, days. */
  linkDays: int().notNull().default(90),
  createdAt: timeColumn().notNull(),
  /** Undone within 30 days, then purged. */
  deletedAt: timeColumn(),
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

/** Invitations into a team by mail: the secret is in the message only, its SHA-256 here. */
export const invitations = mysqlTable(
  "invitations",
  {
    id: idColumn().primaryKey(),
    teamId: idColumn()
      .notNull()
      .references(() => teams.id, { onDelete: "cascade" }),
    email: varchar({ length: 254 }).notNull(),
    role: varchar({ length: 10, enum: ["owner", "analyst", "reader"] }).notNull(),
    tokenSha: sha256Column().notNull(),
    createdBy: idColumn(),
    createdAt: timeColumn().notNull(),
    endsAt: timeColumn().notNull(),
    usedAt: timeColumn(),
    revokedAt: timeColumn(),
  },
  (t) => [uniqueIndex("invitations_token").on(t.tokenSha), index("invitations_team").on(t.teamId)],
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
    /** Hill order, whole: 118 elements with counts take some 600 characters. */
    formula: varchar({ length: 1000 }).notNull(),
    atoms: int().notNull(),
    /** Atomic number per atom, one byte each, then mass numbers as little-endian uint16. */
    elements: bytesColumn().notNull(),
    /** Bonds of the group as little-endian int32 pairs. */
    bonds: bytesColumn().notNull(),
    /**
     * Bond orders, charges and radicals for the drawing, SDF and E/Z: from the file or from a SMILES; null where
     * they are perceived from coordinates when wanted. They never enter identity or RMSD.
     */
    bondTable: jsonColumn(bondTableSchema)(),
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
    /** Name of the entry where the file came out of a zip archive (the source is the archive). */
    entry: varchar({ length: 255 }),
    firstFrame: int().notNull(),
    frames: int().notNull(),
  },
  (t) => [primaryKey({ columns: [t.ensembleId, t.position] }), index("ensemble_files_source").on(t.sourceId)],
);

/** One upload into an ensemble, the first included: what the same bytes sent again are recognised by. */
export const batches = mysqlTable(
  "batches",
  {
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    /** As `ensemble_files.batch`; 0 is the first upload. */
    batch: int().notNull(),
    filesSha: sha256Column().notNull(),
    answers: jsonColumn(answersSchema)().notNull(),
    /** What the search is called by its people, where they say. */
    name: varchar({ length: 200 }),
    createdBy: idColumn(),
    createdByToken: idColumn(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [
    primaryKey({ columns: [t.ensembleId, t.batch] }),
    uniqueIndex("batches_files").on(t.ensembleId, t.filesSha),
  ],
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
    /** Data fields of an SDF record in file order, [name, value] pairs: the source of its numbers as the comment is. */
    fields: jsonColumn(frameFieldsSchema)(),
    /** Which atom of the file (from 0) stands at each place, where the file has another order of atoms than the ensemble. */
    mapping: jsonColumn(frameMappingSchema)(),
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
    /** Level of the geometry where it is another than that of the energy; null: the same, or not said. */
    geometryLevel: varchar({ length: 120 }),
    solvent: varchar({ length: 120 }),
    /** Per-atom properties: the quantity that they share ("shift"), and the atom from 1. */
    quantity: varchar({ length: 120 }),
    atom: int(),
    /** How it was computed; null where it was read from a file. */
    definition: jsonColumn(columnDefinitionSchema)(),
    /** False while an energy is only taken as electronic because nobody said. */
    kindStated: boolean().notNull().default(false),
    createdBy: idColumn(),
    /** Order of arrival among the levels: fixes hue and marker for good. */
    ordinal: int().notNull(),
    energyKind: varchar({ length: 12, enum: ["electronic", "zero-point", "enthalpy", "free"] }),
    temperature: double(),
    unit: varchar({ length: 40 }),
    rule: varchar({ length: 10 }),
    /** Where the numbers come from: "key:energy", "number:3", a file name. */
    origin: varchar({ length: 200 }),
    /** The kept table or structure file; null for numbers of the ensemble's own files and for computed ones. */
    sourceId: idColumn().references(() => sources.id),
    /** Frames with a value, accepted or not. */
    count: int().notNull(),
    /** Little-endian doubles by frame number, 0 where missing, then presence bits (frame 1 is bit 0 of byte 0). */
    data: bytesColumn().notNull(),
    /** SHA-256 of `data`: tells without reading it whether a sift ran on these numbers. */
    dataSha: sha256Column().notNull(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [uniqueIndex("columns_name").on(t.ensembleId, t.name), index("columns_source").on(t.sourceId)],
);

/** What people said of averages: groups of atoms taken apart by hand, measured values. A row an ensemble. */
export const averaging = mysqlTable("averaging", {
  ensembleId: idColumn()
    .primaryKey()
    .references(() => ensembles.id, { onDelete: "cascade" }),
  data: jsonColumn(averagingSchema)().notNull(),
  version: int().notNull().default(1),
  changedAt: timeColumn().notNull(),
});

/** Columns that somebody removed: brought back within 30 days, then purged. */
export const removedColumns = mysqlTable(
  "removed_columns",
  {
    id: idColumn().primaryKey(),
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    name: varchar({ length: 120 }).notNull(),
    /** The row of `columns` without its numbers. */
    facts: anyJson().notNull(),
    sourceId: idColumn().references(() => sources.id),
    data: bytesColumn().notNull(),
    removedBy: idColumn(),
    removedAt: timeColumn().notNull(),
  },
  (t) => [index("removed_columns_ensemble").on(t.ensembleId, t.removedAt)],
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
    /** Checksum of the molecule and the coordinates of all its frames then; null on sifts of older versions. */
    geometrySha: sha256Column(),
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
    /** When it was asked for again: the one asked for last is the ensemble's own. Null where it was asked for once. */
    askedAt: timeColumn(),
  },
  (t) => [
    uniqueIndex("sifts_same").on(t.ensembleId, t.recipeSha, t.inputSha),
    index("sifts_ensemble").on(t.ensembleId, t.createdAt),
  ],
);

/** Shortest distances of all pairs of frames of one atom set: computed by a job, kept for the asking. */
export const pairMatrices = mysqlTable(
  "pair_matrices",
  {
    id: idColumn().primaryKey(),
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    /** Checksum of atom set, mirror choice and frames with their coordinates. */
    inputSha: sha256Column().notNull(),
    recipe: anyJson().notNull(),
    /** Frame numbers of its rows. */
    numbers: anyJson().notNull(),
    jobId: idColumn().notNull(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [uniqueIndex("pair_matrices_same").on(t.ensembleId, t.inputSha)],
);

/** Packed upper triangle without diagonal, row by row, as little-endian floats, in blocks of about 1 MB. */
export const pairMatrixBlocks = mysqlTable(
  "pair_matrix_blocks",
  {
    matrixId: idColumn()
      .notNull()
      .references(() => pairMatrices.id, { onDelete: "cascade" }),
    position: int().notNull(),
    data: bytesColumn().notNull(),
  },
  (t) => [primaryKey({ columns: [t.matrixId, t.position] })],
);

/** A structure from outside that an ensemble is compared with; it takes no part in any computation of it. */
export const outsideStructures = mysqlTable(
  "outside_structures",
  {
    id: idColumn().primaryKey(),
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    name: varchar({ length: 200 }).notNull(),
    sourceId: idColumn()
      .notNull()
      .references(() => sources.id),
    /** Elements, positions, mapping onto the ensemble's atoms, energy where it carries one. */
    data: anyJson().notNull(),
    createdBy: idColumn(),
    createdAt: timeColumn().notNull(),
    deletedAt: timeColumn(),
  },
  (t) => [index("outside_structures_ensemble").on(t.ensembleId, t.createdAt)],
);

/** A refinement plan: its steps and alternatives as the page edits them. */
export const plans = mysqlTable(
  "plans",
  {
    id: idColumn().primaryKey(),
    ensembleId: idColumn()
      .notNull()
      .references(() => ensembles.id, { onDelete: "cascade" }),
    name: varchar({ length: 120 }).notNull(),
    plan: anyJson().notNull(),
    version: int().notNull().default(1),
    createdBy: idColumn(),
    createdAt: timeColumn().notNull(),
    changedAt: timeColumn().notNull(),
    /** Removed, and brought back within 30 days. */
    deletedAt: timeColumn(),
  },
  // Not unique: a removed plan leaves its name to another. Names are looked at under the lock of the ensemble.
  (t) => [index("plans_ensemble").on(t.ensembleId, t.name)],
);

// --- hand-over --------------------------------------------------------------------------------

/** Numbered, immutable snapshots: triggers refuse update and delete, until the team is gone. */
export const editions = mysqlTable(
  "editions",
  {
    id: idColumn().primaryKey(),
    /** No foreign key: a key that cascades would change what must not change; ids are never used again. */
    teamId: idColumn().notNull(),
    ensembleId: idColumn().notNull(),
    /** Counts the editions of the ensemble from 1. */
    number: int().notNull(),
    title: varchar({ length: 200 }).notNull(),
    remark: text().notNull(),
    /** Recipes of everything shown: sift, temperature, weights, levels, comparisons, averages, seeds. */
    recipe: anyJson().notNull(),
    /** SHA-256 of every input: files, accepted frames, columns. */
    inputs: anyJson().notNull(),
    codeVersion: varchar({ length: 40 }).notNull(),
    /** Everything that the edition shows, as JSON text; `contentSha` is of its bytes. */
    content: longTextColumn().notNull(),
    contentSha: sha256Column().notNull(),
    /** Positions of the frames shown: little-endian doubles [frame][atom][xyz]. */
    positions: bytesColumn().notNull(),
    /** Name, size and SHA-256 of each file handed out with it. */
    files: anyJson().notNull(),
    createdBy: idColumn(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [
    uniqueIndex("editions_number").on(t.ensembleId, t.number),
    index("editions_team").on(t.teamId, t.createdAt),
  ],
);

/**
 * The files handed out with an edition, as they were when it was frozen: deflated pieces of about 1 MB. Triggers refuse
 * update and delete, and further pieces of a frozen one; they go with their edition.
 */
export const editionFiles = mysqlTable(
  "edition_files",
  {
    editionId: idColumn()
      .notNull()
      .references(() => editions.id, { onDelete: "cascade" }),
    name: varchar({ length: 60 }).notNull(),
    position: int().notNull(),
    data: bytesColumn().notNull(),
  },
  (t) => [primaryKey({ columns: [t.editionId, t.name, t.position] })],
);

/** Runs of "recompute and verify": newest last. */
export const verifications = mysqlTable(
  "verifications",
  {
    id: idColumn().primaryKey(),
    editionId: idColumn()
      .notNull()
      .references(() => editions.id),
    same: boolean().notNull(),
    /** Files compared, with both checksums where they differ. */
    files: anyJson().notNull(),
    codeVersion: varchar({ length: 40 }).notNull(),
    seconds: double().notNull(),
    createdBy: idColumn(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [index("verifications_edition").on(t.editionId, t.createdAt)],
);

/** Read-only links to one edition: the secret is shown once, its SHA-256 kept. */
export const links = mysqlTable(
  "links",
  {
    id: idColumn().primaryKey(),
    teamId: idColumn().notNull(),
    editionId: idColumn()
      .notNull()
      .references(() => editions.id),
    secretSha: sha256Column().notNull(),
    /** First characters of the secret, for recognition. */
    prefix: varchar({ length: 8 }).notNull(),
    /** For whom it was made. */
    label: varchar({ length: 120 }).notNull().default(""),
    /** Whom to ask, as its maker wrote it. */
    contact: varchar({ length: 200 }).notNull().default(""),
    sources: boolean().notNull().default(false),
    logbook: boolean().notNull().default(false),
    createdBy: idColumn(),
    createdAt: timeColumn().notNull(),
    endsAt: timeColumn().notNull(),
    /** Ended by hand. */
    revokedAt: timeColumn(),
    opened: int().notNull().default(0),
    openedAt: timeColumn(),
    /** When the reminder of its end was queued. */
    remindedAt: timeColumn(),
  },
  (t) => [
    uniqueIndex("links_secret").on(t.secretSha),
    index("links_edition").on(t.editionId),
    index("links_team").on(t.teamId),
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
  (t) => [
    index("logbook_team").on(t.teamId, t.id),
    index("logbook_ensemble").on(t.ensembleId, t.id),
    index("logbook_user").on(t.userId, t.type),
  ],
);

/** Messages to send; the queue retries, a failure never fails the act that made it. */
export const mailQueue = mysqlTable(
  "mail_queue",
  {
    id: idColumn().primaryKey(),
    recipient: varchar({ length: 254 }).notNull(),
    subject: varchar({ length: 200 }).notNull(),
    /** Plain text. */
    body: text().notNull(),
    html: text(),
    attempts: tinyint().notNull().default(0),
    nextTryAt: timeColumn().notNull(),
    sentAt: timeColumn(),
    failedAt: timeColumn(),
    createdAt: timeColumn().notNull(),
  },
  (t) => [index("mail_queue_due").on(t.sentAt, t.nextTryAt)],
);
