/** Colours of figures that leave the product, from the tokens of the light chart: paper has no dark side. */
export const INK = {
  ground: "#fdfefc",
  ink: "#14222c",
  ink2: "#3f4e5a",
  ink3: "#5b6974",
  rule: "#d8dedc",
  axis: "#b3bdbf",
  view: "#fafcfa",
} as const;
export const MARK = "#a8175f";
export const DEPTH = ["#d2eef1", "#a3d0db", "#75b2c7", "#5092b5", "#3371a2", "#215283", "#123465"] as const;

type Point = readonly [number, number];

const FONT = "IBM Plex Sans, Segoe UI, Noto Sans, sans-serif";

/** One spelling for one length: a tenth of a pixel is less than anybody sees. */
const px = (value: number) => String(Math.round(value * 10) / 10);

const ESCAPES: Record<string, string> = { "&": "&amp;", "<": "&lt;", ">": "&gt;", '"': "&quot;" };
// XML 1.0 knows no control characters but tab and line ends, not even escaped.
const escaped = (text: string) =>
  text.replace(/[\p{Cc}\uFFFE\uFFFF]/gu, " ").replace(/[&<>"]/g, (character) => ESCAPES[character] ?? "");

/** An SVG file, element by element, with its title and a line below it in the picture itself. */
export class Drawing {
  private readonly parts: string[] = [];

  constructor(
    private readonly width: number,
    private readonly height: number,
    private readonly title: string,
    subtitle: string,
  ) {
    this.text(16, 22, title, { fill: INK.ink, strong: true, size: 14 });
    // About 7 px a letter of 12 px in the widest of the fonts: what would run out of the picture is cut.
    const most = Math.floor((width - 32) / 7);
    this.text(16, 38, subtitle.length > most ? `${subtitle.slice(0, most - 1)}…` : subtitle, {});
  }

  line(a: Point, b: Point, stroke: string, width: number, cap: "round" | "butt" = "round"): void {
    this.parts.push(
      `<line x1="${px(a[0])}" y1="${px(a[1])}" x2="${px(b[0])}" y2="${px(b[1])}" stroke="${stroke}" stroke-width="${px(width)}" stroke-linecap="${cap}"/>`,
    );
  }

  path(points: readonly Point[], stroke: string, width: number): void {
    const d = points.map(([x, y], k) => `${k === 0 ? "M" : "L"}${px(x)} ${px(y)}`).join("");
    this.parts.push(
      `<path d="${d}" fill="none" stroke="${stroke}" stroke-width="${px(width)}" stroke-linejoin="round"/>`,
    );
  }

  rect(x: number, y: number, width: number, height: number, fill: string): void {
    this.parts.push(
      `<rect x="${px(x)}" y="${px(y)}" width="${px(width)}" height="${px(height)}" fill="${fill}"/>`,
    );
  }

  circle(x: number, y: number, radius: number, fill: string, stroke: string | null): void {
    const rim = stroke === null ? "" : ` stroke="${stroke}"`;
    this.parts.push(`<circle cx="${px(x)}" cy="${px(y)}" r="${px(radius)}" fill="${fill}"${rim}/>`);
  }

  text(
    x: number,
    y: number,
    text: string,
    { anchor = "start", fill = INK.ink3, strong = false, size = 12 }: TextLook,
  ): void {
    this.parts.push(
      `<text x="${px(x)}" y="${px(y)}" font-size="${size}"${strong ? ' font-weight="600"' : ""} fill="${fill}" text-anchor="${anchor}">${escaped(text)}</text>`,
    );
  }

  toString(): string {
    const { width, height } = this;
    return `<?xml version="1.0" encoding="UTF-8"?>\n<svg xmlns="http://www.w3.org/2000/svg" width="${width}" height="${height}" viewBox="0 0 ${width} ${height}" font-family="${FONT}">\n<title>${escaped(this.title)}</title>\n<rect width="${width}" height="${height}" fill="${INK.ground}"/>\n${this.parts.join("\n")}\n</svg>\n`;
  }
}

interface TextLook {
  anchor?: "start" | "middle" | "end";
  fill?: string;
  strong?: boolean;
  size?: number;
}
