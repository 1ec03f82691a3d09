import type { Token } from "~/lib/view/mark";

/** Radii, widths and colours of the 3D view, shared by canvas, still picture and their marks. */

export const BALL_RADIUS = 0.16; // Å
const STICK_RADIUS = 0.1;
const HYDROGEN_RADIUS = 0.07;

export type Rgb = readonly [number, number, number];
export type Palette = Record<Token, { hex: string; rgb: Rgb }>;

const ATOM_TOKENS: Record<number, Token> = {
  1: "atom-h",
  6: "atom-c",
  7: "atom-n",
  8: "atom-o",
  9: "atom-f",
  15: "atom-p",
  16: "atom-s",
  17: "atom-cl",
  35: "atom-br",
  53: "atom-i",
};

/** Token of the colour of an element; hues are the trade's. */
export function atomToken(z: number): Token {
  return ATOM_TOKENS[z] ?? "atom-other";
}

/** N, O, S and halogens are drawn as small balls, and elements the tint table does not know. */
export function isBall(z: number): boolean {
  return z !== 1 && z !== 6 && z !== 15;
}

/** Å; bonds to hydrogen are thinner. */
export function stickRadius(a: number, b: number): number {
  return a === 1 || b === 1 ? HYDROGEN_RADIUS : STICK_RADIUS;
}

/** Share of their radius that sticks and balls keep where lines lie around them. */
const SLIM = 0.5;
const SLIM_BALL = 0.7;

/**
 * How the structures in atom colours of an overlay are told apart: the first is solid, each further one wider, paler and
 * a little behind, so that its rim shows even where it lies exactly on the first.
 *
 * Among lines the first is thin: a conformer a fifth of an ångström away then runs beside it, not inside it.
 *
 * @param behind 0 for the first one, and for all where they stand side by side
 * @param among true where further conformers lie around them as lines
 * @returns `slim` and `slimBall`, shares of the radii of sticks and balls, `wider` in Å to be added to them, `own` the share of its own colour in that of the ground, `back` in Å away from the reader
 */
export function layerOf(
  behind: number,
  among = false,
): { slim: number; slimBall: number; wider: number; own: number; back: number } {
  const own = [1, 0.55, 0.42, 0.34][behind] ?? 0.34;
  return {
    slim: among ? SLIM : 1,
    slimBall: among ? SLIM_BALL : 1,
    wider: 0.055 * behind,
    own,
    back: 0.12 * behind,
  };
}

/** Width of a line in CSS pixels: 1 to 4 with the step of the tint. */
export function lineWidth(step: number | null): number {
  return step === null ? 1.5 : 1 + (step - 1) / 2;
}

/** Pixels per Å from which lines have their full width: a stick is then 4.8 px wide, the widest line 4. */
const FULL_WIDTH_FROM = 24;

/** Lines get thinner where sticks do, so that a small picture keeps its order of importance. */
export function lineShare(pixelsPerAngstrom: number): number {
  return Math.min(1, Math.max(0.4, pixelsPerAngstrom / FULL_WIDTH_FROM));
}

/** More lines than this lie over one another so often that opacity says nothing. */
const OPAQUE_FROM = 20;

/** Opacity by population, below 20 conformers only. */
export function lineOpacity(step: number | null, conformers: number): number {
  return step === null || conformers >= OPAQUE_FROM ? 1 : Math.min(1, 0.6 + 0.1 * (step - 1));
}

export function mixed(ground: Rgb, colour: Rgb, share: number): Rgb {
  const mix = (i: 0 | 1 | 2) => ground[i] + (colour[i] - ground[i]) * share;
  return [mix(0), mix(1), mix(2)];
}

const TOKENS: readonly Token[] = [
  "ink",
  "ink-2",
  "ink-3",
  "rule",
  "edge",
  "view",
  "mark",
  "held",
  "held-edge",
  "held-ground",
  ...([1, 2, 3, 4, 5, 6, 7] as const).map((step) => `depth-${step}` as const),
  ...Object.values(ATOM_TOKENS),
  "atom-other",
];

/** The colours of the tokens as the page has them now. Needs a document. */
export function readPalette(): Palette {
  const style = getComputedStyle(document.documentElement);
  const paint = document.createElement("canvas").getContext("2d");
  const read = (token: Token) => {
    // The canvas writes every spelling of an opaque colour as #rrggbb.
    if (paint) paint.fillStyle = style.getPropertyValue(`--color-${token}`).trim();
    const hex = typeof paint?.fillStyle === "string" ? paint.fillStyle : "#000000";
    const part = (from: number) => Number.parseInt(hex.slice(from, from + 2), 16) / 255;
    return { hex, rgb: [part(1), part(3), part(5)] as const };
  };
  return Object.fromEntries(TOKENS.map((token) => [token, read(token)])) as Palette;
}
