import { escapeControls } from "../../lib/text/escape.ts";
import type { Grant } from "../auth/access.server.ts";
import { log } from "../log.server.ts";
import { type FormPart, fileBytes } from "./read-multipart.server.ts";
import { Reading, type ReadingOptions } from "./reading.server.ts";
import { FileStore } from "./store-files.server.ts";

/** One upload on its way: what it wrote so far, and how to take that back. */
export class Upload {
  reading: Reading;
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

  /** Id of the kept bytes of a file of the reading. */
  sourceOf(at: number): string {
    return this.store.written[at]?.sourceId ?? "";
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
