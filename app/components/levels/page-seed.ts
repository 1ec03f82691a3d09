/** Seed of every figure by chance on the pages: with the same input the same digits. */
export const PAGE_SEED = 412;
