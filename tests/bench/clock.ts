/** Seconds of processor time that this process has used, all its threads together. */
export function processor(): number {
  const { user, system } = process.cpuUsage();
  return (user + system) / 1e6;
}

export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const half = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2;
}

/** Processor seconds of each of `runs` calls, after one that does not count (it compiles). */
export function timed(runs: number, work: () => void): number[] {
  work();
  return Array.from({ length: runs }, () => {
    const from = processor();
    work();
    return processor() - from;
  });
}
