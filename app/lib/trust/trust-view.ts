/** One search, or one part of a search, and the frames it brought. */
export interface SearchView {
  /** What it is called by its people, or its files. */
  name: string;
  /** Ranges of frame numbers, both ends included. */
  ranges: [number, number][];
}

/** Where the frames of an ensemble come from: its uploads, one search each. */
export interface TrustView {
  searches: SearchView[];
}
