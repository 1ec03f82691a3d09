/** Search nodes of a whole sift after which single comparisons get fewer, so that no molecule makes it endless. */
export const GENEROUS_NODES = 100e6;
export const GENEROUS_SYMMETRY_NODES = 5e6;
export const FRUGAL_NODE_LIMIT = 5_000;
