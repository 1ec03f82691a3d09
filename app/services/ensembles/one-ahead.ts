/**
 * Writes one thing while the next is being made: the reader of a file does not stand still for the database, and no more
 * than one piece waits.
 *
 * @example await ahead.push(() => insert(block)); // returns once the piece before is written
 */
export class OneAhead {
  private last: Promise<void> = Promise.resolve();

  /** Begins the work; waits first for what was begun before, and throws what that threw. */
  async push(work: () => Promise<void>): Promise<void> {
    await this.last;
    this.last = work();
    // Whoever pushes next hears of a failure; until then it must not count as one that nobody handles.
    this.last.catch(() => {});
  }

  /** Waits for the last piece. */
  end(): Promise<void> {
    return this.last;
  }
}
