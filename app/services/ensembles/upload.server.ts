import type { Transaction } from "../../db/client.server.ts";
import { escapeControls } from "../../lib/text/escape.ts";
import type { Grant } from "../auth/access.server.ts";
import { log } from "../log.server.ts";
import { type FormPart, fileBytes } from "./read-multipart.server.ts";
import type { StoredFile } from "./read-stored.server.ts";
import { Reading, type ReadingOptions } from "./reading.server.ts";
import { FileStore } from "./store-files.server.ts";

/** One upload on its way: what it wrote so far, and how to take that back. */
export class Upload {
  reading: Reading;
  /** Of the files as sent. */
  readonly names: string[] = [];
  readonly store: FileStore;
  private readonly grant: Grant;

  constructor(grant: Grant, options: ReadingOptions) {
    const { energyFrom } = options;
    this.grant = grant;
    this.reading = new Reading(grant.teamId, {
      ...options,
      energyFrom: energyFrom === "none" ? null : energyFrom,
    });
    this.store = new FileStore(grant.teamId);
  }

  /** The files as they are kept. */
  kept(): StoredFile[] {
    return this.store.written.map(({ sourceId }, at) => ({ name: this.names[at] ?? "", sourceId }));
  }

  /**
   * Lets the kept files answer for their checksums.
   *
   * @returns their ids, one a file of the reading
   */
  async publish(tx: Transaction): Promise<string[]> {
    const ids = await this.store.publish(tx);
    return this.reading.files.map(({ source }) => ids[source] ?? "");
  }

  begin(): Promise<void> {
    return this.reading.begin(this.grant);
  }

  async readFile(part: Extract<FormPart, { kind: "file" }>): Promise<void> {
    const plain = escapeControls(part.filename).trim();
    const name = plain === "" ? `file ${this.names.length + 1}` : [...plain].slice(0, 255).join("");
    this.names.push(name);
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
