import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";

// Colours as measured things. Contrast: WCAG 2.2, relative luminance. OKLab: the published matrices of its author's
// definition (2020). Colour-deficient vision: IEEE Trans. Vis. Comput. Graph. 2009, 15, 1291, severity 1.
// The least values are the design's own: 4.5 for text and 3 for marks are WCAG's, the distances common practice, no source.

type Triple = [number, number, number];
const css = readFileSync(new URL("../app/tokens.css", import.meta.url), "utf8");

function read(text: string): Map<string, string> {
  return new Map([...text.matchAll(/--color-([a-z0-9-]+): (#[0-9a-f]{6});/g)].map((m) => [m[1]!, m[2]!]));
}
const themes = {
  light: read(css.slice(css.indexOf("@theme"), css.indexOf("@media screen"))),
  dark: read(css.slice(css.lastIndexOf('data-theme="dark"]'))),
};
const system = read(
  css.slice(
    css.indexOf("prefers-color-scheme: dark", css.indexOf("@media screen")),
    css.lastIndexOf("@media screen"),
  ),
);

function linear(hex: string): Triple {
  return [1, 3, 5].map((i) => {
    const v = Number.parseInt(hex.slice(i, i + 2), 16) / 255;
    return v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4;
  }) as Triple;
}
const luminance = (hex: string) => {
  const [r, g, b] = linear(hex);
  return 0.2126 * r + 0.7152 * g + 0.0722 * b + 0.05;
};
function contrast(a: string, b: string): number {
  const [x, y] = [luminance(a), luminance(b)];
  return Math.max(x, y) / Math.min(x, y);
}
function oklab([r, g, b]: Triple): Triple {
  const l = Math.cbrt(0.4122214708 * r + 0.5363325363 * g + 0.0514459929 * b);
  const m = Math.cbrt(0.2119034982 * r + 0.6806995451 * g + 0.1073969566 * b);
  const s = Math.cbrt(0.0883024619 * r + 0.2817188376 * g + 0.6299787005 * b);
  return [
    0.2104542553 * l + 0.793617785 * m - 0.0040720468 * s,
    1.9779984951 * l - 2.428592205 * m + 0.4505937099 * s,
    0.0259040371 * l + 0.7827717662 * m - 0.808675766 * s,
  ];
}
const VISIONS: Record<string, Triple[]> = {
  normal: [
    [1, 0, 0],
    [0, 1, 0],
    [0, 0, 1],
  ],
  protan: [
    [0.152286, 1.052583, -0.204868],
    [0.114503, 0.786281, 0.099216],
    [-0.003882, -0.048116, 1.051998],
  ],
  deutan: [
    [0.367322, 0.860646, -0.227968],
    [0.280085, 0.672501, 0.047413],
    [-0.01182, 0.04294, 0.968881],
  ],
  tritan: [
    [1.255528, -0.076749, -0.178779],
    [-0.078411, 0.930809, 0.147602],
    [0.004733, 0.691367, 0.3039],
  ],
};
function seen(hex: string, vision: Triple[]): Triple {
  const [r, g, b] = linear(hex);
  return oklab(vision.map((row) => Math.min(1, Math.max(0, row[0] * r + row[1] * g + row[2] * b))) as Triple);
}
function distance(a: string, b: string, vision: Triple[]): number {
  const [x, y] = [seen(a, vision), seen(b, vision)];
  return Math.hypot(x[0] - y[0], x[1] - y[1], x[2] - y[2]);
}

describe.each(Object.entries(themes))("%s colours", (_name, tokens) => {
  const colour = (name: string) => {
    const found = tokens.get(name);
    if (found === undefined) throw new Error(`No colour ${name}.`);
    return found;
  };
  const ramp = (name: string, count: number) =>
    Array.from({ length: count }, (_, i) => colour(`${name}-${i + 1}`));
  const below = (pairs: [string, string][], least: number) =>
    pairs
      .map(([a, b]) => ({ pair: `${a} on ${b}`, contrast: contrast(colour(a), colour(b)) }))
      .filter((found) => found.contrast < least);
  const cross = (inks: string[], grounds: string[]) =>
    inks.flatMap((ink) => grounds.map((ground): [string, string] => [ink, ground]));

  it("keep text at 4.5 on every ground it stands on", () => {
    const inks = ["ink", "ink-2", "ink-3", "link", "mark", "held", "remark", "danger", "good"];
    const states = ["held", "remark", "danger", "good"].map((s): [string, string] => [s, `${s}-ground`]);
    expect(below(cross(inks, ["paper", "sheet", "sunk"]), 4.5)).toEqual([]);
    expect(below(cross(["ink", "ink-2", "ink-3", "mark"], ["mark-wash"]), 4.5)).toEqual([]);
    expect(below([...states, ["on-action", "action"]], 4.5)).toEqual([]);
  });

  it("keep edges, levels and atoms at 3", () => {
    const states = ["held", "remark", "danger", "good"].map((s) => `${s}-edge`);
    const atoms = [...tokens.keys()].filter((name) => name.startsWith("atom-"));
    const levels = Array.from({ length: 6 }, (_, i) => `level-${i + 1}`);
    expect(atoms).toHaveLength(11);
    expect(below(cross(["edge"], ["paper", "sheet", "sunk"]), 3)).toEqual([]);
    expect(below(cross(states, ["sheet"]), 3)).toEqual([]);
    expect(below(cross(levels, ["paper", "sheet", "view"]), 3)).toEqual([]);
    expect(below(cross(atoms, ["view"]), 3)).toEqual([]);
  });

  it.each(Object.entries(VISIONS))("keep levels and depth steps apart in %s vision", (_vision, matrix) => {
    const levels = ramp("level", 6);
    const between = levels.flatMap((a, i) => levels.slice(0, i).map((b) => distance(a, b, matrix)));
    const depth = ramp("depth", 7);
    const steps = depth.slice(1).map((step, i) => distance(step, depth[i]!, matrix));
    expect(Math.min(...between)).toBeGreaterThanOrEqual(0.1);
    expect(Math.min(...steps)).toBeGreaterThanOrEqual(0.085);
  });

  it("deepen in even steps of lightness, away from the ground", () => {
    const lightness = ramp("depth", 7).map((hex) => oklab(linear(hex))[0]);
    const steps = lightness.slice(1).map((l, i) => Math.abs(l - lightness[i]!));
    expect(Math.min(...steps) / Math.max(...steps)).toBeGreaterThanOrEqual(0.9);
    const onSheet = ramp("depth", 7).map((hex) => contrast(hex, colour("sheet")));
    expect(onSheet).toEqual([...onSheet].sort((a, b) => a - b));
  });
});

it("is dark alike by the system and by choice", () => {
  expect(system.size).toBeGreaterThan(40);
  expect([...system]).toEqual([...themes.dark]);
});
