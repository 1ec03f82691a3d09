/** Where the downloads of an edition lie: behind a link, or for members. */
export interface EditionAddresses {
  file(name: string): string;
  source(position: number): string;
  positions: string;
}
