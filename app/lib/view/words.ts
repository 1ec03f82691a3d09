import { formatPercent, plural } from "../format.ts";
import { measureKind } from "../measure/measure.ts";
import type { Figure, Scene } from "./scene.ts";

/**
 * The picture in words, for readers who do not see it.
 *
 * @param caption what the page says above the picture
 */
export function sceneWords(scene: Scene, caption: { strong: string; rest: string }): string {
  const title = [caption.strong, caption.rest].filter((part) => part !== "").join(" ");
  if (scene.strong.length === 0) return `${title}. No conformer is shown.`;
  const named = scene.strong.map(figureWords).join(", ");
  const apart = scene.mode === "side" && scene.strong.length > 1 ? " side by side" : "";
  const others =
    scene.faint.length > 0 ? `, ${plural(scene.faint.length, "other")} as lines tinted by population` : "";
  const beyond =
    scene.selectedBeyond === 0
      ? ""
      : scene.faint.length > 0
        ? ` (${scene.selectedBeyond} of them selected)`
        : `; ${scene.selectedBeyond} more selected, not drawn`;
  const changes = scene.strong.flatMap(({ name, change }) =>
    change ? [` In ${name}: ${change.words}.`] : [],
  );
  return `${title}. ${named} in atom colours${apart}${others}${beyond}.${changes.join("")}`;
}

function figureWords({ name, frame, population, held, outside }: Figure): string {
  const facts = [
    outside ? "from outside" : name === `frame ${frame}` ? null : `frame ${frame}`,
    population === null ? null : formatPercent(population, 1),
    held ? "held" : null,
  ].filter((fact) => fact !== null);
  return facts.length > 0 ? `${name} (${facts.join(", ")})` : name;
}

/**
 * The line below the picture: what is measured, or what to do.
 *
 * @param unbonded of four picked atoms the first two neighbours that no bond joins ("C2–O3"); null where they are a chain
 */
export function pickWords(
  picked: readonly number[],
  texts: readonly string[],
  unbonded: string | null = null,
): string {
  const kind = measureKind(picked);
  if (kind === "torsion" && unbonded !== null && texts.length > 0) {
    return `${texts.join("; ")}. ${unbonded} not bonded: an angle between planes, no torsion of a bond.`;
  }
  if (kind !== null && texts.length > 0) {
    const noun = kind === "distance" ? "Distance" : kind === "angle" ? "Angle" : "Torsion";
    return `${noun} ${texts.join("; ")}.`;
  }
  return picked.length === 1
    ? `${texts[0] ?? "One atom"} picked: pick a second one for a distance.`
    : "Click two, three or four atoms to measure.";
}
