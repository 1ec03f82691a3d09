/** Types for the tests. */
export function openDatabase(options?: {
  folder?: string;
  durable?: boolean;
  broad?: boolean;
  say?: (text: string) => void;
}): Promise<{
  url: string;
  ownerUrl: string;
  keepAlive(log: { warn(text: string): void; error(fields: object, text: string): void }): NodeJS.Timeout;
  close(): Promise<void>;
}>;
export function runningUrl(folder?: string): string | null;
export function openThrowaway(say: (text: string) => void): Promise<{
  url: string;
  ownerUrl: string;
  close(): Promise<void>;
}>;
