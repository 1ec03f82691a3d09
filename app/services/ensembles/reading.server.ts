import { setImmediate as breathe } from "node:timers/promises";
import { and, eq, sql } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { ensembles, frameBlocks, frames } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError, type Fault } from "../../lib/errors.ts";
import { formatBytes, formatCount } from "../../lib/format.ts";
import { type Classification, FrameClassifier } from "../../lib/intake/classify.ts";
import { EnergyScan } from "../../lib/intake/energies.ts";
import { formatMessage } from "../../lib/intake/format-message.ts";
import { MessageList } from "../../lib/intake/message-list.ts";
import { IntakeRejection } from "../../lib/intake/reject.ts";
import type { XyzFrame } from "../../lib/xyz/frame.ts";
import { XYZ_READER_VERSION, XyzReader } from "../../lib/xyz.server.ts";
import { BlockWriter } from "./block-writer.server.ts";
import { checkFormat } from "./check-format.ts";
import { type FrameDecision, FrameWriter, writeDecisions } from "./frame-writer.server.ts";
import { openFile } from "./open-file.server.ts";

/** Longest time that reading keeps the process from other requests. */
const BREATH_MS = 15;
/** Bytes of a file parsed in one go. */
const PIECE_BYTES = 65_536;
/**
 * Bytes and lines that may pass without a frame. The largest frame is a thousand atoms with a thousand columns; what goes
 * on longer is no structure file, and a small packed one could keep the reader busy for minutes.
 */
const BARREN = { bytes: 16 * 2 ** 20, lines: 100_000 };
/** How often a row in flight shows that its upload lives. */
const SIGN_OF_LIFE_MS = 60_000;

export interface ReadFile {
  position: number;
  name: string;
  format: string;
  firstFrame: number;
  frames: number;
}

/** Frames, molecule and messages of an upload, once all its files are read. */
export interface ReadResult {
  classification: Classification;
  group: NonNullable<Classification["group"]>;
  graph: NonNullable<Classification["graph"]>;
  frames: number;
  files: ReadFile[];
  /** Final states of frames that the judge did not simply accept. */
  decisions: Map<number, FrameDecision>;
  messages: MessageList;
  scan: EnergyScan;
  firstComment: string;
  /** Most frames have an extended comment: its further keys are columns. */
  extended: boolean;
  atomLabels: (string | null)[] | null;
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
  private readonly classifier = new FrameClassifier();
  private readonly messages = new MessageList();
  private readonly scan: EnergyScan;
  /** What the comments were scanned for while the files were read. */
  readonly energyFrom: string | null;
  private readonly labels = new Map<number, (string | null)[]>();
  private frames = 0;
  private sound = 0;
  private extended = 0;
  private firstComment = "";
  private breath = performance.now();
  private signOfLife = Date.now();

  /** @param energyFrom the caller's choice of the number, where it is known before the first file */
  constructor(teamId: string, energyFrom: string | null) {
    this.teamId = teamId;
    this.blocks = new BlockWriter(this.ensembleId);
    this.rows = new FrameWriter(this.ensembleId);
    this.energyFrom = energyFrom;
    this.scan = new EnergyScan({ from: energyFrom });
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
    const settings = env();
    const remark = (message: Parameters<MessageList["add"]>[0]) => this.messages.add(message);
    const file = await openFile(source, { file: name, limit: settings.MAX_FILE_BYTES, remark });
    const reader = new XyzReader({
      file: name,
      firstNumber: this.frames + 1,
      limits: { frames: settings.MAX_FRAMES, atoms: settings.MAX_ATOMS },
    });
    const position = this.files.length;
    const before = this.frames;
    let barren = 0;
    let lastLine = 0;
    for await (const chunk of checkFormat(name, file.bytes, remark)) {
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
    const format = file.packed ? "XYZ, gzip" : "XYZ";
    this.files.push({ position, name, format, firstFrame: before + 1, frames: this.frames - before });
  }

  private async takeAll(file: number, found: XyzFrame[]): Promise<void> {
    for (const frame of found) await this.take(file, frame);
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
    const row = { number, file, line, label, comment };
    if (problem) {
      const { reason, ...message } = problem;
      this.messages.add(message);
      const note = message.message;
      await this.rows.add({
        ...row,
        shape: null,
        indexInShape: null,
        state: "held",
        holdReason: reason,
        note,
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
      energy: comment === "" ? null : comment,
    });
    await this.blocks.add(place.shape, frame.positions);
    this.messages.addAll(frame.remarks);
    this.scan.add({ number, file: frame.file, line }, comment);
    if (this.sound === 0) this.firstComment = comment;
    this.sound += 1;
    if (frame.extended) this.extended += 1;
    if (frame.labels && !this.labels.has(place.shape)) this.labels.set(place.shape, [...frame.labels]);
    const remark = frame.remarks[0]?.message ?? null;
    const state = remark === null ? "accepted" : "remarked";
    await this.rows.add({ ...row, ...place, state, holdReason: null, note: remark });
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
    const classification = this.classifier.finish();
    const { group, graph, shape } = classification;
    if (group === null || graph === null || shape === null) throw this.nothingUsable(classification);
    if (shape !== 0) await this.makeFirst(shape);
    const decisions = new Map<number, FrameDecision>();
    for (const verdict of classification.frames) {
      if (verdict.state === "accepted") continue;
      this.messages.addAll(verdict.messages);
      decisions.set(verdict.frame, {
        number: verdict.frame,
        state: verdict.state,
        holdReason: verdict.reason,
        note: verdict.messages[0]?.message ?? null,
      });
    }
    this.messages.addAll(classification.messages);
    await writeDecisions(this.ensembleId, [...decisions.values()]);
    return {
      classification,
      group,
      graph,
      frames: this.frames,
      files: this.files,
      decisions,
      messages: this.messages,
      scan: this.scan,
      firstComment: this.firstComment,
      extended: this.extended * 2 > this.sound,
      atomLabels: this.labels.get(shape) ?? null,
    };
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
