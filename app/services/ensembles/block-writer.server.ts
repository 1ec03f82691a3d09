import { createHash } from "node:crypto";
import { insertFrameBlock } from "../../db/queries/insert-blobs.server.ts";
import { OneAhead } from "./one-ahead.ts";

/** Coordinates a block holds, about: a row that every packet limit lets pass. */
const BLOCK_BYTES = 2 ** 20;
/** Many shapes in one file would each fill a block of their own; beyond this sum all are written out. */
const MEMORY_BYTES = 16 * 2 ** 20;

interface OpenBlock {
  positions: Float64Array;
  /** Doubles a frame. */
  frameLength: number;
  first: number;
  count: number;
}

/** What was written of one shape. */
export interface WrittenShape {
  frames: number;
  /** Checksums of its blocks in order. */
  blocks: Buffer[];
}

/** Packs frames into blocks by shape while they are read; memory stays flat however long the file is. */
export class BlockWriter {
  readonly shapes = new Map<number, WrittenShape>();
  private readonly open = new Map<number, OpenBlock>();
  private readonly ahead = new OneAhead();
  private readonly ensembleId: string;
  private openBytes = 0;

  constructor(ensembleId: string) {
    this.ensembleId = ensembleId;
  }

  /**
   * Adds a frame to its shape.
   *
   * @param positions packed x, y, z in Å; copied
   * @returns index of the frame within its shape
   */
  async add(shape: number, positions: Float64Array): Promise<number> {
    const written = this.shapes.get(shape) ?? { frames: 0, blocks: [] };
    this.shapes.set(shape, written);
    const capacity = Math.max(1, Math.floor(BLOCK_BYTES / Math.max(1, positions.byteLength)));
    const block =
      this.open.get(shape) ?? this.begin(shape, positions.length, Math.min(capacity, 16), written.frames);
    this.grow(block, capacity);
    block.positions.set(positions, block.count * positions.length);
    block.count += 1;
    written.frames += 1;
    const index = written.frames - 1;
    if (block.count >= capacity) await this.flush(shape);
    else if (this.openBytes > MEMORY_BYTES) await this.flushAll();
    return index;
  }

  /** Writes out everything that is still in memory. */
  async end(): Promise<void> {
    await this.flushAll();
    await this.ahead.end();
  }

  private async flushAll(): Promise<void> {
    for (const shape of [...this.open.keys()]) await this.flush(shape);
  }

  private begin(shape: number, frameLength: number, frames: number, first: number): OpenBlock {
    const block = { positions: new Float64Array(frameLength * frames), frameLength, first, count: 0 };
    this.openBytes += block.positions.byteLength;
    this.open.set(shape, block);
    return block;
  }

  /** A file of many small groups should not take a whole block's memory for each. */
  private grow(block: OpenBlock, capacity: number): void {
    if ((block.count + 1) * block.frameLength <= block.positions.length) return;
    const larger = new Float64Array(Math.min(block.positions.length * 4, capacity * block.frameLength));
    larger.set(block.positions);
    this.openBytes += larger.byteLength - block.positions.byteLength;
    block.positions = larger;
  }

  private async flush(shape: number): Promise<void> {
    const block = this.open.get(shape);
    const written = this.shapes.get(shape);
    if (!block || !written) return;
    this.open.delete(shape);
    this.openBytes -= block.positions.byteLength;
    const data = Buffer.from(block.positions.buffer, 0, block.count * block.frameLength * 8);
    const sha256 = createHash("sha256").update(data).digest();
    written.blocks.push(sha256);
    const { ensembleId } = this;
    const { first, count } = block;
    await this.ahead.push(() => insertFrameBlock({ ensembleId, shape, first, count, data, sha256 }));
  }
}
