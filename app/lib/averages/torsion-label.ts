/**
 * Words for torsions as the trade writes them: t, g+, g-, c, a+, a-. Ranges of 60 degrees about the staggered and
 * eclipsed places (Klyne, Prelog, Experientia 1960, 16, 521, from memory): c up to 30, g 30 to 90, a 90 to 150, t above.
 */
export type TorsionLabel = "c" | "g+" | "g\u2212" | "a+" | "a\u2212" | "t";

/**
 * @param degrees in (-180, 180]; null where the torsion is undefined
 * @returns "–" where undefined
 * @example torsionLabel(-64) // "g−"
 */
export function torsionLabel(degrees: number | null): TorsionLabel | "\u2013" {
  if (degrees === null) return "\u2013";
  const size = Math.abs(degrees);
  if (size <= 30) return "c";
  if (size > 150) return "t";
  const sign = degrees > 0 ? "+" : "\u2212";
  return size <= 90 ? `g${sign}` : `a${sign}`;
}

/**
 * Label of a conformer by several torsions, in their order: "t g+ g−".
 *
 * @example shapeLabel([178, 62, -58]) // "t g+ g−"
 */
export function shapeLabel(torsions: readonly (number | null)[]): string {
  return torsions.map(torsionLabel).join(" ");
}

/**
 * The label of the mirror image: signs exchanged.
 *
 * @example mirrorLabel("t g+ g−") // "t g− g+"
 */
export function mirrorLabel(label: string): string {
  return label.replace(/[+\u2212]/g, (sign) => (sign === "+" ? "\u2212" : "+"));
}

/**
 * The label of a conformer that stands for a mirror pair: of its two hands the one whose first signed torsion is plus.
 *
 * @example pairLabel("t g− g+") // "t g+ g−"
 */
export function pairLabel(label: string): string {
  const sign = /[+\u2212]/.exec(label)?.[0];
  return sign === "\u2212" ? mirrorLabel(label) : label;
}
