import { setImmediate as breathe } from "node:timers/promises";
import { and, eq, sql } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { ensembles, frameBlocks, frames } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError, type Fault } from "../../lib/errors.ts";
import { formatBytes, formatCount } from "../../lib/format.ts";
import { type Classification, FrameClassifier } from "../../lib/intake/classify.ts";
import { commaEnergy, commaField } from "../../lib/intake/comma-energy.ts";
import { EnergyScan } from "../../lib/intake/energies.ts";
import { namesEnergy } from "../../lib/intake/energy-words.ts";
import { isExtended } from "../../lib/intake/extended-comment.ts";
import { energiesAsWritten } from "../../lib/intake/field-energies.ts";
import { formatMessage } from "../../lib/intake/format-message.ts";
import type { FrameVerdict, MoleculeGroup } from "../../lib/intake/frame-record.ts";
import { MessageList } from "../../lib/intake/message-list.ts";
import {
  AS_PROPOSED,
  chosenFrame,
  type FrameAsk,
  HOLD,
  type OpenReading,
  type ReadingChoices,
  withDecimalPoints,
  withProposals,
} from "../../lib/intake/reading-choices.ts";
import {
  configurationQuestion,
  groupQuestion,
  heldMessage,
  PREVIEWS,
  readingQuestion,
  waitingMessage,
} from "../../lib/intake/reading-questions.ts";
import { IntakeRejection } from "../../lib/intake/reject.ts";
import type { IntakeMessage, IntakeQuestion } from "../../lib/intake/report.ts";
import { isSdfFrame, type SdfFrame } from "../../lib/sdf/frame.ts";
import { SDF_READER_VERSION, SdfReader } from "../../lib/sdf.server.ts";
import { quoteFound } from "../../lib/text/escape.ts";
import { sniff } from "../../lib/text/sniff.ts";
import type { XyzFrame } from "../../lib/xyz/frame.ts";
import { XYZ_READER_VERSION, XyzReader } from "../../lib/xyz.server.ts";
import { BlockWriter } from "./block-writer.server.ts";
import { checkFormat } from "./check-format.ts";
import { type FrameDecision, FrameWriter, writeDecisions } from "./frame-writer.server.ts";
import type { FramesTold } from "./frames-read.server.ts";
import { keptOpen, type OpenedFile, openFile, refusalOfPacked, tooManyBytes } from "./open-file.server.ts";
import { isZip, shownName, ZipArchive, type ZipEntry } from "./zip-archive.server.ts";

/** Longest time that reading keeps the process from other requests. */
const BREATH_MS = 15;
/** Bytes of a file parsed in one go. */
const PIECE_BYTES = 65_536;
/**
 * Bytes and lines that may pass without a frame. The largest frame is a thousand atoms with a thousand columns; what goes
 * on longer is no structure file, and a small packed one could keep the reader busy for minutes.
 */
const BARREN = { bytes: 16 * 2 ** 20, lines: 100_000 };
/** Molecules that are offered to choose from. */
const MOST_CHOICES = 12;
/** How often a row in flight shows that its upload lives. */
const SIGN_OF_LIFE_MS = 60_000;

export interface ReadFile {
  position: number;
  /** Which of the kept files it is, from 0: entries of one archive share theirs. */
  source: number;
  /** Of the file as sent. */
  name: string;
  /** Of the file inside of it, where that is an archive. */
  entry: string | null;
  format: string;
  firstFrame: number;
  frames: number;
}

/** What is known before the first file. */
export interface ReadingOptions {
  /** The caller's choice of the number; null where there is none. */
  energyFrom: string | null;
  /** The molecule that frames are compared with; by default what most of them have in common. */
  group?: MoleculeGroup;
  /** Frames of that molecule in another order of atoms are put into its order. */
  map?: boolean;
  /** A further batch: frames and files that the ensemble has already, and its number from 0. */
  after?: { frames: number; files: number; batch: number };
  /** What was answered of how the files are to be read; the rest is read as proposed and asked. */
  choices?: ReadingChoices;
  /** Frames that a person released while they waited: read as proposed, whatever was answered for the others. */
  settled?: ReadonlySet<number>;
  /** Told now and then of the frames of these files read so far. */
  told?: FramesTold;
}

/** Frames, molecule and messages of an upload, once all its files are read. */
export interface ReadResult {
  classification: Classification;
  group: NonNullable<Classification["group"]>;
  graph: NonNullable<Classification["graph"]>;
  /** Of these files alone. */
  frames: number;
  files: ReadFile[];
  /** The shape that became 0, or would have; null where no frame has the group's order of atoms. */
  shape: number | null;
  /** Frames of the molecule wait in another order of atoms: they can be mapped now that the group is known. */
  otherOrder: boolean;
  /** What the files leave open of how they are to be read. */
  questions: IntakeQuestion[];
  /** Final states of frames that the judge did not simply accept. */
  decisions: Map<number, FrameDecision>;
  messages: MessageList;
  scan: EnergyScan;
  firstComment: string;
  /** Most frames have an extended comment: its further keys are columns. */
  extended: boolean;
  atomLabels: (string | null)[] | null;
}

/** Office files are zip archives, too: their first entry gives them away. */
function refuseOffice(file: string, head: Uint8Array): void {
  const { refusal } = sniff(head, file);
  if (refusal) throw new IntakeRejection({ file, ...refusal });
}

function noStructures(file: string, first: IntakeMessage | null): IntakeRejection {
  const why = first === null ? "It is empty." : `${first.file}: ${first.message}`;
  const message = `The archive holds no structure file. ${why}`;
  return new IntakeRejection({ code: "G09", file, message, hint: "Pack XYZ or SDF files." });
}

function noFrames(file: string, lastLine: number): IntakeRejection {
  const most = `${formatBytes(BARREN.bytes)} or ${formatCount(BARREN.lines)} lines`;
  return new IntakeRejection({
    code: "G11",
    file,
    line: Math.max(1, lastLine),
    message: `From here on the file holds no frame for more than ${most}.`,
    hint: "Look whether the file was damaged, or is no XYZ.",
  });
}

/** How the first atoms of a frame in another order would be mapped. */
function openOrder(frame: XyzFrame, mapping: Int32Array): OpenReading {
  const moved = [...mapping].flatMap((from, to) => (from === to ? [] : [`${from + 1}→${to + 1}`]));
  const shown = { map: moved.slice(0, 3).join(" "), hold: "as it is" };
  return { ask: "order", proposed: "map", line: frame.line, shown };
}

/**
 * Reads the files of one upload into rows that nobody sees yet: coordinates in blocks, frames, and in memory only what
 * does not grow with their comments and coordinates. `discard` leaves nothing behind.
 */
export class Reading {
  /** Id of the row in flight, and of the ensemble that it becomes. */
  readonly ensembleId = newId();
  readonly files: ReadFile[] = [];
  private readonly teamId: string;
  private readonly blocks: BlockWriter;
  private readonly rows: FrameWriter;
  private readonly classifier: FrameClassifier;
  private readonly messages = new MessageList();
  private readonly scan: EnergyScan;
  /** What was known before the first file. */
  readonly options: ReadingOptions;
  private readonly labels = new Map<number, (string | null)[]>();
  private readonly formats = new Set<string>();
  private readonly choices: ReadingChoices;
  private readonly settled: ReadonlySet<number>;
  /** Frames that wait for an answer, with the state that their reader gave them, and what they wait for first. */
  private readonly waiting = new Map<number, { state: "accepted" | "remarked"; open: OpenReading }>();
  /** Frames that the answer holds, where it does not hold for all. */
  private readonly refused = new Map<number, OpenReading>();
  /** What is asked, of how many frames, and the first of them. */
  private readonly asked = new Map<FrameAsk, { frames: number; first: OpenReading[] }>();
  /** Numbers of some frames have decimal commas. */
  decimalCommas = false;
  /** Energies with a decimal comma in frames whose coordinates have points; what their reader made of the frame. */
  private readonly commaEnergies = new Map<
    number,
    { text: string; line: number; state: "accepted" | "remarked" }
  >();
  /** The comments are to be looked through again with points: known only when all frames are there. */
  scanAgain = false;
  private frames = 0;
  private sources = 0;
  private sound = 0;
  private extended = 0;
  private firstComment = "";
  private breath = performance.now();
  private signOfLife = Date.now();

  constructor(teamId: string, options: ReadingOptions) {
    this.teamId = teamId;
    this.options = options;
    this.choices = withProposals(options.choices ?? {});
    this.settled = options.settled ?? new Set();
    this.blocks = new BlockWriter(this.ensembleId);
    this.rows = new FrameWriter(this.ensembleId);
    this.classifier = new FrameClassifier({ group: options.group, map: options.map });
    this.scan = new EnergyScan({ from: options.energyFrom, maxColumns: env().MAX_COLUMNS });
  }

  /** Versions of the readers that read the files. */
  get readerVersion(): string {
    return [...this.formats].sort().join(", ") || XYZ_READER_VERSION;
  }

  /** Makes the row in flight. */
  async begin(by: { userId: string | null; tokenId: string | null }): Promise<void> {
    const now = new Date();
    await db.insert(ensembles).values({
      id: this.ensembleId,
      teamId: this.teamId,
      name: "",
      filesSha: null,
      answers: {
        energyUnit: null,
        energyFrom: null,
        level: null,
        energyKind: "electronic",
        energyTemperature: null,
      },
      formula: "",
      atoms: 0,
      elements: Buffer.alloc(0),
      bonds: Buffer.alloc(0),
      chirality: "unsure",
      frames: 0,
      accepted: 0,
      remarked: 0,
      held: 0,
      openQuestions: 0,
      acceptedSha: Buffer.alloc(32),
      readerVersion: XYZ_READER_VERSION,
      createdBy: by.userId,
      createdByToken: by.tokenId,
      createdAt: now,
      changedAt: now,
      deletedAt: now,
      readingSince: now,
    });
  }

  /**
   * Reads one file.
   *
   * @param source its bytes as sent; left early where the file is refused
   * @throws IntakeRejection, or DomainError too-large
   */
  async readFile(name: string, source: AsyncIterable<Uint8Array>): Promise<void> {
    const remark = (message: Parameters<MessageList["add"]>[0]) => this.messages.add(message);
    const file = await openFile(source, { file: name, limit: env().MAX_FILE_BYTES, remark });
    const own = this.sources++;
    try {
      if (isZip(file.head)) await this.readArchive(name, own, file);
      else await this.readOpened({ name, source: own, entry: null }, file);
    } catch (error) {
      if (!file.packed || !(error instanceof IntakeRejection)) throw error;
      throw await refusalOfPacked(error, file.bytes);
    } finally {
      await file.bytes.return(undefined);
    }
  }

  /** Every file of a zip archive; one that cannot be read is refused by itself. */
  private async readArchive(name: string, source: number, file: OpenedFile): Promise<void> {
    refuseOffice(name, file.head);
    const archive = await ZipArchive.from(keptOpen(file.bytes), name);
    try {
      const entries = await archive.entries();
      const limit = env().MAX_FILE_BYTES;
      if (entries.reduce((sum, { bytes }) => sum + bytes, 0) > limit) throw tooManyBytes(name, limit);
      const had = this.frames;
      let first: IntakeMessage | null = null;
      for (const entry of entries) {
        const refused = await this.readEntry(archive, entry, { name, source });
        if (refused) this.messages.add(refused);
        first ??= refused;
      }
      if (this.frames === had) throw noStructures(name, first);
    } finally {
      await archive.close();
    }
  }

  /** @returns why the entry was refused; null where it was read */
  private async readEntry(
    archive: ZipArchive,
    entry: ZipEntry,
    of: { name: string; source: number },
  ): Promise<IntakeMessage | null> {
    const own = shownName(entry.name);
    if (entry.refusal !== null) {
      const message = `The file in the archive was not taken in: ${entry.refusal}`;
      return { code: "G09", severity: "reject", file: own, message };
    }
    const had = this.frames;
    const bytes = archive.unpack(entry);
    try {
      await this.readOpened({ ...of, entry: own }, { bytes, packed: false, head: new Uint8Array(0) });
      return null;
    } catch (error) {
      if (!(error instanceof IntakeRejection) || this.frames > had || error.report.file !== own) throw error;
      return error.report;
    } finally {
      await bytes.return(undefined);
    }
  }

  private async readOpened(
    of: { name: string; source: number; entry: string | null },
    file: OpenedFile,
  ): Promise<void> {
    const name = of.entry ?? of.name;
    const settings = env();
    const remark = (message: Parameters<MessageList["add"]>[0]) => this.messages.add(message);
    const { format, bytes } = await checkFormat(name, keptOpen(file.bytes), remark);
    const { after } = this.options;
    const before = this.frames + (after?.frames ?? 0);
    const Reader = format === "sdf" ? SdfReader : XyzReader;
    this.formats.add(format === "sdf" ? SDF_READER_VERSION : XYZ_READER_VERSION);
    const reader = new Reader({
      file: name,
      firstNumber: before + 1,
      limits: { frames: settings.MAX_FRAMES, atoms: settings.MAX_ATOMS },
      choices: this.readerChoices(),
    });
    const position = this.files.length + (after?.files ?? 0);
    const had = this.frames;
    let barren = 0;
    let lastLine = 0;
    for await (const chunk of bytes) {
      for (let at = 0; at < chunk.length; at += PIECE_BYTES) {
        const piece = chunk.subarray(at, at + PIECE_BYTES);
        const found = reader.push(piece);
        const { lines } = reader.summary();
        barren = found.length > 0 ? 0 : barren + piece.length;
        if (found.length > 0) lastLine = lines;
        if (barren > BARREN.bytes || lines - lastLine > BARREN.lines) throw noFrames(name, lastLine);
        await this.takeAll(position, found);
      }
    }
    await this.takeAll(position, reader.end());
    this.messages.addAll(reader.messages);
    const kind = format === "sdf" ? "SDF" : "XYZ";
    this.files.push({
      ...of,
      position,
      format: file.packed ? `${kind}, gzip` : of.entry === null ? kind : `${kind}, zip`,
      firstFrame: before + 1,
      frames: this.frames - had,
    });
  }

  /** Where single frames were released, the readers read all as proposed, and what the answer holds is held here. */
  private readerChoices(): ReadingChoices {
    if (this.settled.size === 0) return this.choices;
    const asked = Object.entries(this.choices).map(([ask, option]) => [
      ask,
      option === HOLD ? AS_PROPOSED : option,
    ]);
    return Object.fromEntries(asked) as ReadingChoices;
  }

  private async takeAll(file: number, found: XyzFrame[]): Promise<void> {
    for (const frame of found) await this.take(file, frame);
    if (found.length > 0) this.options.told?.(this.frames);
    if (performance.now() - this.breath < BREATH_MS) return;
    await breathe();
    this.breath = performance.now();
    if (Date.now() - this.signOfLife < SIGN_OF_LIFE_MS) return;
    this.signOfLife = Date.now();
    await db.update(ensembles).set({ readingSince: new Date() }).where(eq(ensembles.id, this.ensembleId));
  }

  private async take(file: number, frame: XyzFrame): Promise<void> {
    this.frames += 1;
    const { number, line, label, comment, problem } = frame;
    const sdf = isSdfFrame(frame) ? frame : null;
    const row = { number, file, line, label, comment, fields: sdf?.fields ?? null };
    if (problem) {
      const { reason, ...message } = problem;
      this.messages.add(message);
      await this.rows.add({
        ...row,
        shape: null,
        indexInShape: null,
        mapping: null,
        state: "held",
        holdReason: reason,
        note: message.message,
      });
      return;
    }
    const place = this.classifier.add({
      frame: number,
      file: frame.file,
      line,
      elements: frame.elements,
      isotopes: frame.isotopes,
      positions: frame.positions,
      charge: frame.charge,
      multiplicity: frame.multiplicity,
      energy: sdf ? energiesAsWritten(sdf.fields) : comment === "" ? null : comment,
      table: sdf,
      // A record of an SDF is mapped without asking (row S22), a frame of XYZ once somebody said so (X13).
      map: sdf !== null || this.choices.order !== HOLD || this.settled.has(number),
    });
    const { shape, indexInShape, mapping } = place;
    await this.blocks.add(shape, place.positions);
    this.messages.addAll(frame.remarks);
    if (frame.decimalCommas) this.decimalCommas = true;
    const numbers = frame.decimalCommas ? withDecimalPoints(comment) : comment;
    this.scan.add({ number, file: frame.file, line }, numbers, sdf?.fields);
    if (this.sound === 0) this.firstComment = comment;
    this.sound += 1;
    if (sdf ? sdf.fields.size > 0 : isExtended(comment)) this.extended += 1;
    if (frame.labels && mapping === null && !this.labels.has(shape))
      this.labels.set(shape, [...frame.labels]);
    const note = frame.remarks[0]?.message ?? null;
    const state = note === null ? "accepted" : "remarked";
    const comma = frame.decimalCommas ? null : this.commaOf(comment, sdf);
    if (comma !== null) this.commaEnergies.set(number, { text: comma, line: sdf ? line : line + 1, state });
    this.askOf(frame, mapping, state);
    await this.rows.add({ ...row, shape, indexInShape, mapping, state, holdReason: null, note });
  }

  /** The energy of a frame as it is written, where that has a comma: what was named as the energy counts as one. */
  private commaOf(comment: string, sdf: SdfFrame | null): string | null {
    const named = this.options.energyFrom;
    return sdf
      ? commaField(sdf.fields, (name) => namesEnergy(name) || named === `field:${name}`)
      : commaEnergy(comment, (key) => namesEnergy(key) || named === `key:${key}`);
  }

  /** Notes what a frame leaves open; it is held until that is answered. */
  private askOf(frame: XyzFrame, mapping: Int32Array | null, state: "accepted" | "remarked"): void {
    if (this.settled.has(frame.number)) return;
    const open = [...(frame.open ?? [])];
    const held = open.find(({ ask }) => this.choices[ask] === HOLD);
    if (held) {
      this.refused.set(frame.number, held);
      return;
    }
    if (mapping !== null && !isSdfFrame(frame) && this.choices.order === AS_PROPOSED) {
      open.push(openOrder(frame, mapping));
    }
    const [first] = open;
    if (first === undefined) return;
    this.waiting.set(frame.number, { state, open: first });
    for (const reading of open) this.count(reading);
  }

  private count(reading: OpenReading): void {
    const asked = this.asked.get(reading.ask) ?? { frames: 0, first: [] };
    this.asked.set(reading.ask, asked);
    asked.frames += 1;
    if (asked.first.length < PREVIEWS) asked.first.push(reading);
  }

  /**
   * Energies with a decimal comma are asked about where most frames write theirs so (row X22); one among others is a
   * slip, and its frame has no energy (row E10).
   */
  private askOfCommas(): void {
    if (this.commaEnergies.size * 2 <= this.sound) return;
    const choice = this.choices["decimal-comma"];
    this.scanAgain = choice !== HOLD;
    if (this.scanAgain) this.decimalCommas = true;
    for (const [number, { text, line, state }] of this.commaEnergies) {
      if (this.settled.has(number) || this.refused.has(number)) continue;
      const shown = { comma: text.replace(",", "."), hold: text };
      const open: OpenReading = { ask: "decimal-comma", proposed: "comma", line, shown, of: "energy" };
      if (choice === HOLD) this.refused.set(number, open);
      else if (choice === AS_PROPOSED) {
        if (!this.waiting.has(number)) this.waiting.set(number, { state, open });
        this.count(open);
      }
    }
  }

  /**
   * Decides what the ensemble is and writes out what is left: afterwards all rows of frames and blocks are there, the
   * ensemble's own molecule as shape 0.
   *
   * @throws DomainError invalid where no frame can be used
   */
  async end(): Promise<ReadResult> {
    await this.blocks.end();
    await this.rows.end();
    this.askOfCommas();
    const batch = this.options.after !== undefined;
    const classification = this.classifier.finish({
      like: chosenFrame(this.choices.group),
      // A further batch is compared with what the ensemble is. Frames that were mapped count for the first time.
      configuration: batch ? null : (chosenFrame(this.choices.configuration) ?? "most"),
    });
    const { group, graph, shape } = classification;
    if (group === null || graph === null || (shape === null && !batch)) {
      throw this.nothingUsable(classification);
    }
    if (shape !== null && shape !== 0 && !batch) await this.makeFirst(shape);
    const decisions = new Map<number, FrameDecision>();
    for (const verdict of classification.frames) {
      const decision = this.decide(verdict);
      if (decision !== null) decisions.set(verdict.frame, decision);
    }
    this.messages.addAll(classification.messages);
    await writeDecisions(this.ensembleId, [...decisions.values()]);
    return {
      classification,
      group,
      graph,
      frames: this.frames,
      files: this.files,
      shape,
      otherOrder: classification.frames.some(
        ({ frame, reason }) =>
          reason === "other-order" &&
          (this.choices.order !== HOLD || this.settled.has(frame) || this.isInSdf(frame)),
      ),
      questions: this.questions(classification),
      decisions,
      messages: this.messages,
      scan: this.scan,
      firstComment: this.firstComment,
      extended: this.extended * 2 > this.sound,
      atomLabels: shape === null ? null : (this.labels.get(shape) ?? null),
    };
  }

  /** What becomes of a frame beyond being accepted, with the messages that go along. */
  private decide(verdict: FrameVerdict): FrameDecision | null {
    const { frame: number, state, reason } = verdict;
    const waits = this.waiting.get(number);
    const refused = this.refused.get(number);
    const open = refused ?? waits?.open;
    if (state === "held" || open === undefined) {
      if (state === "accepted") return null;
      this.messages.addAll(verdict.messages);
      return { number, state, holdReason: reason, note: verdict.messages[0]?.message ?? null };
    }
    const file = this.fileOf(number);
    const { ask, line } = open;
    const told = refused ? heldMessage(ask) : waitingMessage(ask);
    const found = open.of === "energy" ? { found: quoteFound(open.shown.hold ?? "") } : {};
    this.messages.add({ ...told, ...found, file, line, frame: number });
    if (refused) return { number, state: "held", holdReason: "unclear", note: told.message };
    const readState = state === "remarked" ? state : (waits?.state ?? state);
    return { number, state: "held", readState, holdReason: "waits-for-answer", note: told.message };
  }

  private fileOf(frame: number): string {
    const own = this.files.find(
      ({ firstFrame, frames }) => frame >= firstFrame && frame < firstFrame + frames,
    );
    return own?.entry ?? own?.name ?? "";
  }

  private isInSdf(frame: number): boolean {
    return this.files.some(
      ({ format, firstFrame, frames }) =>
        format.startsWith("SDF") && frame >= firstFrame && frame < firstFrame + frames,
    );
  }

  private questions({ molecules, configurations, frames }: Classification): IntakeQuestion[] {
    const { after } = this.options;
    const batch = after?.batch ?? 0;
    const asked: IntakeQuestion[] = [...this.asked].map(([ask, { frames, first }]) =>
      readingQuestion(ask, frames, first, batch),
    );
    const [most, next] = molecules;
    const inSdf = this.files.some(({ format }) => format.startsWith("SDF"));
    // A stray frame of another molecule is held and told; a choice is offered where there is one.
    const several = most !== undefined && next !== undefined && (inSdf || 2 * next.frames >= most.frames);
    if (after) return asked;
    if (several && this.choices.group === AS_PROPOSED) {
      asked.push(groupQuestion(molecules.slice(0, MOST_CHOICES), inSdf));
    }
    // Row S23 asks, row X40 holds. A frame that was chosen for another molecule is no answer for this one.
    const chosen = chosenFrame(this.choices.configuration);
    const answered = frames.some(({ frame, state }) => frame === chosen && state !== "held");
    if (inSdf && configurations.length > 1 && !answered) {
      asked.push(configurationQuestion(configurations.slice(0, MOST_CHOICES)));
    }
    return asked;
  }

  /** The group's sequence of elements becomes shape 0, in blocks and frames alike. */
  private async makeFirst(shape: number): Promise<void> {
    for (const [from, to] of [
      [0, -1],
      [shape, 0],
      [-1, shape],
    ] as const) {
      await db
        .update(frameBlocks)
        .set({ shape: to })
        .where(and(eq(frameBlocks.ensembleId, this.ensembleId), eq(frameBlocks.shape, from)));
    }
    await db
      .update(frames)
      .set({ shape: sql`if(${frames.shape} = 0, ${shape}, 0)` })
      .where(and(eq(frames.ensembleId, this.ensembleId), sql`${frames.shape} in (0, ${shape})`));
  }

  private nothingUsable(classification: Classification): DomainError {
    this.messages.addAll(classification.frames.flatMap((verdict) => verdict.messages));
    const holds = this.messages.messages().filter((message) => message.severity === "hold");
    const faults = holds.map((message): Fault => {
      const { file, frame, line } = message;
      return { file, frame, line, message: formatMessage(message) };
    });
    const first = faults[0]?.message ?? "";
    const detail =
      this.frames === 1
        ? `The only frame cannot be used. ${first}`
        : `None of the ${formatCount(this.frames)} frames can be used. The first: ${first}`;
    return new DomainError("invalid", "No frame can be used", detail, { faults });
  }

  /** Takes back everything; the rows of frames and blocks go with the row in flight. */
  async discard(): Promise<void> {
    await db
      .delete(ensembles)
      .where(and(eq(ensembles.id, this.ensembleId), sql`${ensembles.readingSince} is not null`));
  }
}
