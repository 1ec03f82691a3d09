interface Backup {
  product: string;
  version: string;
  made: string;
  sha256: string;
  tables: Record<string, { rows: number; sha256: string }>;
  rows: number;
}

interface Options {
  url: string;
  folder: string;
  say?: (text: string) => void;
}

export function backUp(options: Options & { version: string }): Promise<Backup & { bytes: number }>;
export function restore(options: Options): Promise<Backup>;
