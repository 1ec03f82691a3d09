/**
 * JSON text with one spelling for one value: keys in code-point order, no blanks, shortest numbers. Equal values give equal
 * bytes, whatever order their keys were set in; members that are `undefined` are left out, -0 is written as 0.
 *
 * @throws TypeError on a number that is not finite and on what JSON does not know
 * @example canonicalJson({ b: 1, a: [true, null] }) // {"a":[true,null],"b":1}
 */
export function canonicalJson(value: unknown): string {
  if (value === null || typeof value === "boolean") return String(value);
  if (typeof value === "string") return JSON.stringify(value);
  if (typeof value === "number") {
    if (!Number.isFinite(value)) throw new TypeError(`${value} has no place in JSON.`);
    return JSON.stringify(value);
  }
  if (Array.isArray(value)) return `[${value.map(canonicalJson).join(",")}]`;
  if (typeof value === "object") {
    const members = Object.entries(value)
      .filter(([, member]) => member !== undefined)
      .sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0))
      .map(([key, member]) => `${JSON.stringify(key)}:${canonicalJson(member)}`);
    return `{${members.join(",")}}`;
  }
  throw new TypeError(`${typeof value} has no place in JSON.`);
}
