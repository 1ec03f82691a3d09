/** Longest name of a structure, in characters of its column. */
const MAX_NAME = 200;

/**
 * A name that no other structure beside the ensemble has: the one asked for, else with a number behind.
 *
 * @example nameApart("pose.sdf", new Set(["pose.sdf"])) // "pose.sdf, 2"
 */
export function nameApart(asked: string, taken: ReadonlySet<string>): string {
  let name = asked.slice(0, MAX_NAME);
  for (let n = 2; taken.has(name); n++) {
    const behind = `, ${n}`;
    name = `${asked.slice(0, MAX_NAME - behind.length)}${behind}`;
  }
  return name;
}
