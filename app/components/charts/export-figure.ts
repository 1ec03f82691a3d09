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

/**
 * The figure on the page as a file of its own: the same drawing, with its styles written in, on the ground of the page.
 *
 * @returns SVG text that any program opens without the page's style sheet
 */
export function figureSvg(svg: SVGSVGElement, title: string): string {
  const copy = svg.cloneNode(true) as SVGSVGElement;
  writeStyles(svg, copy);
  for (const node of copy.querySelectorAll("[data-screen-only]")) node.remove();
  for (const node of copy.querySelectorAll("*")) node.removeAttribute("class");
  const { width, height } = svg.getBoundingClientRect();
  copy.setAttribute("xmlns", "http://www.w3.org/2000/svg");
  copy.setAttribute("width", String(Math.round(width)));
  copy.setAttribute("height", String(Math.round(height)));
  copy.setAttribute("viewBox", `0 0 ${Math.round(width)} ${Math.round(height)}`);
  copy.removeAttribute("style");
  copy.removeAttribute("class");
  copy.removeAttribute("tabindex");
  // A file of a drawing is a drawing: nothing in it runs, leads away or is a page.
  for (const node of copy.querySelectorAll("title, script, foreignObject")) node.remove();
  for (const node of copy.querySelectorAll("a")) node.replaceWith(...node.children);
  const ground = document.createElementNS("http://www.w3.org/2000/svg", "rect");
  ground.setAttribute("width", "100%");
  ground.setAttribute("height", "100%");
  ground.setAttribute("fill", getComputedStyle(document.documentElement).backgroundColor);
  copy.prepend(ground);
  const name = document.createElementNS("http://www.w3.org/2000/svg", "title");
  name.textContent = title;
  copy.prepend(name);
  return `<?xml version="1.0" encoding="UTF-8"?>\n${new XMLSerializer().serializeToString(copy)}\n`;
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

/** The figure as a PNG file at twice its size on the page. The browser draws the SVG file, so both show the same. */
export async function savePng(name: string, svg: SVGSVGElement, title: string): Promise<void> {
  const { width, height } = svg.getBoundingClientRect();
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
