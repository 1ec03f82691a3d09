import { fontRules } from "./figure-fonts";

/** What the numbers of a figure belong to: a temperature, a level, a rule of weights. */
export interface FigureFact {
  name: string;
  unit?: string;
  value: string | number;
}

/** What stands with the numbers in every file of a figure. */
export interface FigureContext {
  facts: readonly FigureFact[];
  note?: string;
}

const keyOf = ({ name, unit }: { name: string; unit?: string }) => (unit ? `${name} [${unit}]` : name);

/**
 * The facts as a line under a title.
 *
 * @example factsLine([{ name: "temperature", unit: "K", value: 298.15 }]) // "temperature 298.15 K"
 */
export function factsLine(facts: readonly FigureFact[]): string {
  return facts
    .map(({ name, unit, value }) => {
      const number = (found: number) =>
        unit === "kcal/mol" ? found.toFixed(2) : String(Number(found.toPrecision(6)));
      const text = typeof value === "number" ? number(value) : value;
      return `${name} ${text}${unit ? `\u00a0${unit}` : ""}`;
    })
    .join("; ");
}

/**
 * A table with one more column a fact, the same in every row: a cell of a CSV keeps what it belongs to when it is copied.
 *
 * @example withFacts(["p"], [[0.5]], [{ name: "temperature", unit: "K", value: 300 }]).head // ["p", "temperature [K]"]
 */
export function withFacts(
  head: readonly string[],
  rows: readonly (readonly (string | number | null)[])[],
  facts: readonly FigureFact[],
): { head: string[]; rows: (string | number | null)[][] } {
  const values = facts.map(({ value }) => value);
  return { head: [...head, ...facts.map(keyOf)], rows: rows.map((row) => [...row, ...values]) };
}

/** Properties that make up the look of a figure; everything else is the browser's own. */
const STYLES = [
  "fill",
  "fill-opacity",
  "stroke",
  "stroke-width",
  "stroke-dasharray",
  "stroke-linecap",
  "stroke-linejoin",
  "opacity",
  "paint-order",
  "font-family",
  "font-size",
  "font-weight",
  "text-anchor",
  "font-variant-numeric",
] as const;

/** Ground around the drawing, px, so that no axis or unit touches the edge of the file. */
const EDGE = 16;
const TITLE_PX = 14;
const LINE_PX = 19;
/** About the width of a letter of a semi-bold title; wide enough for most, and the line has the edge to spare. */
const LETTER_PX = 7.6;
const SMALL_PX = 12;
const SMALL_LINE_PX = 16;
const SMALL_LETTER_PX = 6.3;

/** How large the file is: the drawing, its title above it in as many lines as it needs, and ground around both. */
function frameOf(svg: SVGSVGElement, title: string, context: FigureContext) {
  const box = svg.getBoundingClientRect();
  const inner = { width: Math.round(box.width), height: Math.round(box.height) };
  const lines = titleLines(title, Math.max(8, Math.floor(inner.width / LETTER_PX)));
  const most = Math.max(8, Math.floor(inner.width / SMALL_LETTER_PX));
  const small = [factsLine(context.facts), context.note ?? ""].flatMap((text) => titleLines(text, most));
  const top = EDGE + lines.length * LINE_PX + small.length * SMALL_LINE_PX + (lines.length > 0 ? 8 : 0);
  return { inner, lines, small, top, width: inner.width + 2 * EDGE, height: top + inner.height + EDGE };
}

/**
 * A title in lines of at most so many letters, broken between words; a longer word stands in a line of its own.
 *
 * @example titleLines("How the count hangs on the tolerance", 20) // ["How the count hangs", "on the tolerance"]
 */
export function titleLines(title: string, most: number): string[] {
  const lines: string[] = [];
  for (const word of title.split(/\s+/).filter(Boolean)) {
    const last = lines.at(-1);
    if (last !== undefined && last.length + 1 + word.length <= most)
      lines[lines.length - 1] = `${last} ${word}`;
    else lines.push(word);
  }
  return lines;
}

/**
 * The figure on the page as a file of its own: the same drawing, with its styles written in, on the ground of the page,
 * with its title above it and under that what its numbers belong to.
 *
 * @param rules style rules with the typeface, for who turns it into pixels
 * @returns SVG text that any program opens without the page's style sheet
 */
export function figureSvg(svg: SVGSVGElement, title: string, context: FigureContext, rules = ""): string {
  const copy = svg.cloneNode(true) as SVGSVGElement;
  writeStyles(svg, copy);
  for (const node of copy.querySelectorAll("[data-screen-only]")) node.remove();
  for (const node of copy.querySelectorAll("*")) node.removeAttribute("class");
  const frame = frameOf(svg, title, context);
  for (const name of ["style", "class", "tabindex"]) copy.removeAttribute(name);
  // A file of a drawing is a drawing: nothing in it runs, leads away or is a page.
  for (const node of copy.querySelectorAll("title, script, foreignObject")) node.remove();
  for (const node of copy.querySelectorAll("a")) node.replaceWith(...node.children);
  // The drawing keeps its own coordinates inside; what stood over its edge on the page still shows on the ground around.
  place(copy, {
    x: EDGE,
    y: frame.top,
    ...frame.inner,
    viewBox: `0 0 ${frame.inner.width} ${frame.inner.height}`,
  });
  copy.setAttribute("overflow", "visible");
  const page = getComputedStyle(document.documentElement);
  const file = element("svg", { xmlns: SVG, width: frame.width, height: frame.height });
  file.setAttribute("viewBox", `0 0 ${frame.width} ${frame.height}`);
  const name = element("title", {});
  name.textContent = title;
  file.append(name, element("rect", { width: "100%", height: "100%", fill: page.backgroundColor }));
  for (const [k, line] of frame.lines.entries()) {
    const text = element("text", { x: EDGE, y: EDGE + TITLE_PX + k * LINE_PX, fill: page.color });
    place(text, { "font-family": page.fontFamily, "font-size": `${TITLE_PX}px`, "font-weight": 600 });
    text.textContent = line;
    file.append(text);
  }
  const below = EDGE + frame.lines.length * LINE_PX + SMALL_PX;
  for (const [k, line] of frame.small.entries()) {
    const text = element("text", { x: EDGE, y: below + k * SMALL_LINE_PX, fill: page.color });
    place(text, { "font-family": page.fontFamily, "font-size": `${SMALL_PX}px`, "fill-opacity": 0.75 });
    text.textContent = line;
    file.append(text);
  }
  if (rules !== "") {
    const style = element("style", {});
    style.textContent = rules;
    file.prepend(style);
  }
  file.append(copy);
  return `<?xml version="1.0" encoding="UTF-8"?>\n${new XMLSerializer().serializeToString(file)}\n`;
}

const SVG = "http://www.w3.org/2000/svg";

function element(tag: string, attributes: Record<string, string | number>): SVGElement {
  const made = document.createElementNS(SVG, tag);
  place(made, attributes);
  return made;
}

function place(node: Element, attributes: Record<string, string | number>): void {
  for (const [name, value] of Object.entries(attributes)) node.setAttribute(name, String(value));
}

function writeStyles(from: Element, to: Element): void {
  if (from instanceof SVGElement) {
    const style = getComputedStyle(from);
    for (const name of STYLES) {
      const value = style.getPropertyValue(name);
      if (value !== "") to.setAttribute(name, value);
    }
    to.removeAttribute("style");
  }
  for (const [k, child] of [...from.children].entries()) {
    const other = to.children[k];
    if (other) writeStyles(child, other);
  }
}

/** Pixels of the PNG for one of the page. */
const PNG_SCALE = 2;

/** The figure as a PNG file at twice the size of its SVG file. The browser draws the SVG file, so both show the same. */
export async function savePng(
  name: string,
  svg: SVGSVGElement,
  title: string,
  context: FigureContext,
): Promise<void> {
  const { width, height } = frameOf(svg, title, context);
  const drawing = figureSvg(svg, title, context, await fontRules());
  const address = URL.createObjectURL(new Blob([drawing], { type: "image/svg+xml" }));
  try {
    const image = new Image();
    image.src = address;
    await image.decode();
    const canvas = document.createElement("canvas");
    canvas.width = Math.round(PNG_SCALE * width);
    canvas.height = Math.round(PNG_SCALE * height);
    canvas.getContext("2d")?.drawImage(image, 0, 0, canvas.width, canvas.height);
    const png = await new Promise<Blob | null>((done) => canvas.toBlob(done, "image/png"));
    if (png) saveBlob(name, png);
  } finally {
    URL.revokeObjectURL(address);
  }
}

/**
 * The numbers behind a figure as JSON: what they belong to, and one object a row; keys carry their units, absent is null.
 */
export function figureJson(
  title: string,
  data: {
    columns: readonly { name: string; unit?: string }[];
    rows: readonly (readonly (string | number | null)[])[];
  },
  { facts, note }: FigureContext,
): string {
  const keys = data.columns.map(keyOf);
  const context = Object.fromEntries(facts.map((fact) => [keyOf(fact), fact.value]));
  const rows = data.rows.map((row) => Object.fromEntries(keys.map((key, c) => [key, row[c] ?? null])));
  return `${JSON.stringify({ title, context, ...(note ? { note } : {}), rows }, null, 1)}\n`;
}

/** Hands a text to the browser as a file. */
export function saveText(name: string, type: string, text: string): void {
  saveBlob(name, new Blob([text], { type: `${type};charset=utf-8` }));
}

function saveBlob(name: string, blob: Blob): void {
  const address = URL.createObjectURL(blob);
  const link = document.createElement("a");
  link.href = address;
  link.download = name;
  link.click();
  // Chromium reads the address after the click has returned.
  setTimeout(() => URL.revokeObjectURL(address), 1000);
}
