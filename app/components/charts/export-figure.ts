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

/** How large the file is: the drawing, its title above it in as many lines as it needs, and ground around both. */
function frameOf(svg: SVGSVGElement, title: string) {
  const box = svg.getBoundingClientRect();
  const inner = { width: Math.round(box.width), height: Math.round(box.height) };
  const lines = titleLines(title, Math.max(8, Math.floor(inner.width / LETTER_PX)));
  const top = EDGE + lines.length * LINE_PX + (lines.length > 0 ? 8 : 0);
  return { inner, lines, top, width: inner.width + 2 * EDGE, height: top + inner.height + EDGE };
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
 * with its title above it.
 *
 * @returns SVG text that any program opens without the page's style sheet
 */
export function figureSvg(svg: SVGSVGElement, title: string): string {
  const copy = svg.cloneNode(true) as SVGSVGElement;
  writeStyles(svg, copy);
  for (const node of copy.querySelectorAll("[data-screen-only]")) node.remove();
  for (const node of copy.querySelectorAll("*")) node.removeAttribute("class");
  const frame = frameOf(svg, title);
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
export async function savePng(name: string, svg: SVGSVGElement, title: string): Promise<void> {
  const { width, height } = frameOf(svg, title);
  const address = URL.createObjectURL(new Blob([figureSvg(svg, title)], { type: "image/svg+xml" }));
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

/** The numbers behind a figure as JSON: one object a row, its keys with their units; absent is null. */
export function figureJson(
  title: string,
  data: {
    columns: readonly { name: string; unit?: string }[];
    rows: readonly (readonly (string | number | null)[])[];
  },
): string {
  const keys = data.columns.map(({ name, unit }) => (unit ? `${name} [${unit}]` : name));
  const rows = data.rows.map((row) => Object.fromEntries(keys.map((key, c) => [key, row[c] ?? null])));
  return `${JSON.stringify({ title, rows }, null, 1)}\n`;
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
