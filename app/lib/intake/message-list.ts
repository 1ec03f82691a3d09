import type { IntakeMessage } from "./report.ts";

/** So many messages of one code are listed; the rest is counted. */
export const LISTED_PER_CODE = 100;

interface Tally {
  listed: number;
  total: number;
  last: IntakeMessage;
}

/**
 * Messages of an intake in the order they came, the first 100 of a code and severity; the rest only counted, so that
 * a broken file of any size keeps a bounded report.
 *
 * @example
 * const list = new MessageList();
 * list.add(message);
 * list.messages(); // what came, and one "40 more ..." a code beyond 100
 */
export class MessageList {
  readonly #listed: IntakeMessage[] = [];
  readonly #tallies = new Map<string, Tally>();

  add(message: IntakeMessage): void {
    const key = `${message.severity} ${message.code}`;
    const tally = this.#tallies.get(key) ?? { listed: 0, total: 0, last: message };
    tally.total += 1;
    tally.last = message;
    if (tally.listed < LISTED_PER_CODE) {
      tally.listed += 1;
      this.#listed.push(message);
    }
    this.#tallies.set(key, tally);
  }

  addAll(messages: Iterable<IntakeMessage>): void {
    for (const message of messages) this.add(message);
  }

  /** All that came with this code, listed or not. */
  count(code: string): number {
    let total = 0;
    for (const tally of this.#tallies.values()) if (tally.last.code === code) total += tally.total;
    return total;
  }

  /** The listed ones, then one line for each code that has more. */
  messages(): IntakeMessage[] {
    const rest = [...this.#tallies.values()]
      .filter((tally) => tally.total > tally.listed)
      .map(({ last, listed, total }) => ({
        code: last.code,
        severity: last.severity,
        file: last.file,
        message: `${(total - listed).toLocaleString("en-GB")} more of this kind, not listed.`,
      }));
    return [...this.#listed, ...rest];
  }
}
