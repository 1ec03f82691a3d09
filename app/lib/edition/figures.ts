import { depthStep, formatCount, formatPercent, formatTemperature, trimmed } from "../format.ts";
import { byPopulation } from "../workbench/conformers.ts";
import { cumulativePopulation } from "../workbench/cumulative.ts";
import { energyLadder, mergeLabels } from "../workbench/ladder.ts";
import { roundTicks, tickDigits } from "../workbench/ticks.ts";
import type { EditionContent } from "./content.ts";
import { editionRows } from "./rows.ts";
import { shapesFigure } from "./shape-figure.ts";
import { DEPTH, Drawing, INK, MARK } from "./svg.ts";

/** A figure of an edition: an SVG file that any program opens, on paper's ground, with its title in it. */
export interface EditionFigure {
  name: string;
  title: string;
  svg: string;
}

const WIDTH = 560;
const HEIGHT = 404;
const PLOT = { left: 64, right: 536, top: 80, bottom: 352 };
/** Conformers of a figure that has a line or a bar for each. */
const MOST = 10;

/**
 * The figures of an edition, drawn from its content and the coordinates of its conformers alone: the same content, the
 * same bytes.
 *
 * @param positions packed [conformer][atom][x, y, z], in the order of `kept`
 * @example editionFigures(content, positions)[0]?.name // "figure-shapes.svg"
 */
export function editionFigures(content: EditionContent, positions: Float64Array): EditionFigure[] {
  return [
    shapesFigure(content, positions),
    ladderFigure(content),
    cumulativeFigure(content),
    rangesFigure(content),
    temperatureFigure(content),
  ].flatMap((figure) => (figure === null ? [] : [{ ...figure, name: `figure-${figure.name}.svg` }]));
}

interface Axis {
  title: string;
  low: number;
  high: number;
}

/** Frame, axes and their words; hands back the two scales. */
function axes(drawing: Drawing, x: Axis, y: Axis) {
  const toX = (value: number) => PLOT.left + ((value - x.low) / (x.high - x.low)) * (PLOT.right - PLOT.left);
  const toY = (value: number) =>
    PLOT.bottom - ((value - y.low) / (y.high - y.low)) * (PLOT.bottom - PLOT.top);
  const xTicks = roundTicks(x.low, x.high, 5);
  const yTicks = roundTicks(y.low, y.high, 5);
  for (const tick of yTicks) {
    drawing.line([PLOT.left, toY(tick)], [PLOT.right, toY(tick)], INK.rule, 1);
    drawing.text(PLOT.left - 8, toY(tick) + 4, tick.toFixed(tickDigits(yTicks)), { anchor: "end" });
  }
  for (const tick of xTicks) {
    drawing.text(toX(tick), PLOT.bottom + 18, tick.toFixed(tickDigits(xTicks)), { anchor: "middle" });
  }
  drawing.line([PLOT.left, PLOT.top], [PLOT.left, PLOT.bottom], INK.axis, 1);
  drawing.line([PLOT.left, PLOT.bottom], [PLOT.right, PLOT.bottom], INK.axis, 1);
  drawing.text(PLOT.left - 48, PLOT.top - 12, y.title, { anchor: "start" });
  drawing.text(PLOT.right, PLOT.bottom + 38, x.title, { anchor: "end" });
  return { toX, toY };
}

/** Names to the right of what they name; those that would run into each other stand together. */
function labels(drawing: Drawing, marks: readonly { name: string; x: number; y: number }[]): void {
  for (const { names, x, y } of mergeLabels(marks)) {
    const shown = names.length > 3 ? `${names[0]} and ${names.length - 1} more` : names.join(", ");
    drawing.text(x + 6, y + 4, shown, { fill: INK.ink });
  }
}

const at = (content: EditionContent) =>
  content.populations === null ? "" : ` at ${formatTemperature(content.populations.temperature)} K`;

const figureOf = (content: EditionContent, title: string) =>
  new Drawing(WIDTH, HEIGHT, title, `${content.ensemble.name}${at(content)}`);

function ladderFigure(content: EditionContent) {
  const rows = editionRows(content);
  const ladder = content.populations && energyLadder(rows, content.populations.temperature, null);
  if (!ladder) return null;
  const title = "Energy ladder";
  const drawing = figureOf(content, title);
  const widest = 112 * ladder.widest;
  const { toX, toY } = axes(
    drawing,
    { title: "population, %", low: 0, high: widest },
    { title: "relative energy, kcal/mol", low: -0.035 * ladder.top, high: ladder.top },
  );
  const marks = [];
  for (const { energy, population, name } of ladder.rungs) {
    const y = toY(energy);
    const width = Math.max(1, toX(100 * population) - PLOT.left);
    drawing.rect(PLOT.left, y - 3, width, 6, DEPTH[depthStep(population) - 1]!);
    drawing.rect(toX(100 * population) - 1.5, y - 3, 1.5, 6, INK.ink);
    if (population >= 0.02) marks.push({ name, x: toX(100 * population), y });
  }
  labels(drawing, marks);
  return { name: "energy-ladder", title, svg: drawing.toString() };
}

function cumulativeFigure(content: EditionContent) {
  const rows = editionRows(content);
  const ladder = content.populations && energyLadder(rows, content.populations.temperature, null);
  const cumulative = content.populations && cumulativePopulation(rows);
  if (!ladder || !cumulative) return null;
  const title = "Cumulative population";
  const drawing = figureOf(content, title);
  const { toX, toY } = axes(
    drawing,
    { title: "window, kcal/mol", low: 0, high: ladder.top },
    { title: "population within, %", low: 0, high: 102 },
  );
  const points: [number, number][] = [[toX(0), toY(0)]];
  let held = 0;
  for (const { energy, share } of cumulative.steps) {
    if (energy > ladder.top) break;
    points.push([toX(energy), toY(100 * held)], [toX(energy), toY(100 * share)]);
    held = share;
  }
  points.push([PLOT.right, toY(100 * held)]);
  drawing.path(points, DEPTH[5]!, 2);
  return { name: "cumulative-population", title, svg: drawing.toString() };
}

/** Populations of the computed energies as bars, 95 % of the draws as a line, their share as the lowest in figures. */
function rangesFigure(content: EditionContent) {
  const { uncertainty, populations } = content;
  const ranked = byPopulation(editionRows(content)).slice(0, MOST);
  if (uncertainty === null || populations === null || ranked.length < 2) return null;
  const title = "Populations and how far the error of the level moves them";
  const height = 148 + 26 * ranked.length;
  const drawing = new Drawing(WIDTH, height, title, `${content.ensemble.name}${at(content)}`);
  const right = 440;
  const drawnWith = `line: 95 % of ${formatCount(uncertainty.draws)} draws, ± ${trimmed(uncertainty.sigma, 2)} kcal/mol each`;
  drawing.text(16, height - 10, drawnWith, {});
  const high = Math.max(...ranked.map((row) => uncertainty.populations[row.index]?.high ?? 0), 0.05) * 1.04;
  const toX = (share: number) => PLOT.left + (share / high) * (right - PLOT.left);
  const bottom = 84 + 26 * ranked.length;
  const ticks = roundTicks(0, 100 * high, 5);
  for (const tick of ticks) {
    drawing.line([toX(tick / 100), 80], [toX(tick / 100), bottom], INK.rule, 1);
    drawing.text(toX(tick / 100), bottom + 16, tick.toFixed(tickDigits(ticks)), { anchor: "middle" });
  }
  drawing.text(right, bottom + 34, "population, %", { anchor: "end" });
  drawing.text(WIDTH - 24, 74, "lowest in", { anchor: "end" });
  for (const [k, row] of ranked.entries()) {
    const drawn = uncertainty.populations[row.index];
    const y = 96 + 26 * k;
    drawing.text(PLOT.left - 10, y + 4, row.name, { anchor: "end", fill: INK.ink, strong: true });
    const share = row.population ?? 0;
    drawing.rect(PLOT.left, y - 6, Math.max(1, toX(share) - PLOT.left), 12, DEPTH[depthStep(share) - 1]!);
    if (drawn === undefined) continue;
    drawing.line([toX(drawn.low), y], [toX(drawn.high), y], MARK, 1.5);
    for (const end of [drawn.low, drawn.high]) drawing.line([toX(end), y - 4], [toX(end), y + 4], MARK, 1.5);
    drawing.text(WIDTH - 24, y + 4, formatPercent(drawn.lowest), { anchor: "end", fill: INK.ink });
  }
  return { name: "population-ranges", title, svg: drawing.toString() };
}

function temperatureFigure(content: EditionContent) {
  const { temperatures } = content;
  if (temperatures === null || temperatures.kelvin.length < 2) return null;
  const title = "Populations against temperature";
  const drawing = new Drawing(WIDTH, HEIGHT, title, content.ensemble.name);
  const ranked = byPopulation(editionRows(content)).slice(0, 6);
  const { kelvin } = temperatures;
  const [low, high] = [kelvin[0] ?? 0, kelvin.at(-1) ?? 1];
  const share = (k: number, row: number) => 100 * (temperatures.populations[k]?.[row] ?? 0);
  const most = Math.max(...kelvin.flatMap((_, k) => ranked.map(({ index }) => share(k, index))), 5);
  const { toX, toY } = axes(
    drawing,
    { title: "temperature, K", low, high: high + 0.08 * (high - low) },
    { title: "population, %", low: 0, high: 1.06 * most },
  );
  const marks = [];
  for (const { index, name } of ranked) {
    const points = kelvin.map((temperature, k): [number, number] => [toX(temperature), toY(share(k, index))]);
    drawing.path(points, INK.ink2, 1.5);
    for (const [k, [x, y]] of points.entries()) {
      drawing.circle(x, y, 4, DEPTH[depthStep(share(k, index) / 100) - 1]!, INK.ink);
    }
    marks.push({ name, x: toX(high) + 3, y: points.at(-1)?.[1] ?? 0 });
  }
  labels(drawing, marks);
  return { name: "temperatures", title, svg: drawing.toString() };
}
