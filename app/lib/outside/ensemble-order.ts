/**
 * Coordinates of a structure from outside in the atom order of the ensemble.
 *
 * @param map atom of the structure for each atom of the ensemble, -1 where it shows none: what stands there is not read
 * @param positions flat x, y, z in Å in the structure's own order
 */
export function inEnsembleOrder({
  map,
  positions,
}: {
  map: readonly number[];
  positions: readonly number[];
}): Float64Array {
  const out = new Float64Array(3 * map.length);
  for (const [atom, from] of map.entries()) {
    if (from >= 0) out.set(positions.slice(3 * from, 3 * from + 3), 3 * atom);
  }
  return out;
}
