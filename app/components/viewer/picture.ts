import type { Mark } from "~/lib/view/mark";
import { type Palette, readPalette } from "./look";

/** Canvas pixels per CSS pixel. */
const SHARPNESS = 2;
const TITLE_HEIGHT = 44;
const FONT = '"IBM Plex Sans", "Segoe UI", "Noto Sans", sans-serif';

/**
 * The view as a PNG at twice its size, with its title above it.
 *
 * @param molecules what is drawn below the marks: the 3D canvas, or the still picture without marks
 */
export async function pictureOf(options: {
  molecules: CanvasImageSource;
  marks: readonly Mark[];
  width: number;
  height: number;
  title: string;
  subtitle: string;
}): Promise<Blob> {
  const { width, height } = options;
  const palette = readPalette();
  const canvas = document.createElement("canvas");
  canvas.width = width * SHARPNESS;
  canvas.height = (height + TITLE_HEIGHT) * SHARPNESS;
  const paint = canvas.getContext("2d");
  if (!paint) throw new Error("no 2D canvas");
  paint.scale(SHARPNESS, SHARPNESS);
  paint.fillStyle = palette.view.hex;
  paint.fillRect(0, 0, width, height + TITLE_HEIGHT);
  await document.fonts.ready;
  paint.fillStyle = palette.ink.hex;
  paint.font = `600 14px ${FONT}`;
  paint.fillText(options.title, 12, 22, width - 24);
  paint.fillStyle = palette["ink-2"].hex;
  paint.font = `400 12px ${FONT}`;
  paint.fillText(options.subtitle, 12, 39, width - 24);
  paint.translate(0, TITLE_HEIGHT);
  paint.drawImage(options.molecules, 0, 0, width, height);
  for (const mark of options.marks) paintMark(paint, mark, palette);
  return new Promise((resolve, reject) => {
    canvas.toBlob((blob) => (blob ? resolve(blob) : reject(new Error("no picture"))), "image/png");
  });
}

function paintMark(paint: CanvasRenderingContext2D, mark: Mark, palette: Palette): void {
  paint.lineJoin = "round";
  switch (mark.kind) {
    case "line":
      paint.beginPath();
      mark.points.forEach(([x, y], k) => {
        if (k === 0) paint.moveTo(x, y);
        else paint.lineTo(x, y);
      });
      paint.setLineDash([...(mark.dash ?? [])]);
      stroke(paint, palette[mark.stroke].hex, mark.width);
      paint.setLineDash([]);
      return;
    case "ring":
      paint.beginPath();
      paint.arc(mark.x, mark.y, mark.radius, 0, 2 * Math.PI);
      fill(paint, mark.fill && palette[mark.fill].hex);
      stroke(paint, palette[mark.stroke].hex, mark.width);
      return;
    case "box":
      paint.beginPath();
      paint.roundRect(mark.x, mark.y, mark.width, mark.height, mark.height > 8 ? 2 : 0);
      fill(paint, palette[mark.fill].hex);
      stroke(paint, palette[mark.stroke].hex, 1);
      return;
    case "text":
      paint.font = `${mark.strong ? 500 : 400} 12px ${FONT}`;
      paint.textAlign = mark.anchor === "middle" ? "center" : mark.anchor;
      if (mark.halo) {
        paint.strokeStyle = palette.view.hex;
        paint.lineWidth = 4;
        paint.strokeText(mark.text, mark.x, mark.y);
      }
      paint.fillStyle = palette[mark.fill].hex;
      paint.fillText(mark.text, mark.x, mark.y);
  }
}

function stroke(paint: CanvasRenderingContext2D, colour: string, width: number): void {
  paint.strokeStyle = colour;
  paint.lineWidth = width;
  paint.stroke();
}

function fill(paint: CanvasRenderingContext2D, colour: string | null): void {
  if (colour === null) return;
  paint.fillStyle = colour;
  paint.fill();
}

/** Hands a file to the reader. */
export function saveAs(blob: Blob, name: string): void {
  const url = URL.createObjectURL(blob);
  const link = document.createElement("a");
  link.href = url;
  link.download = name;
  link.click();
  URL.revokeObjectURL(url);
}

/** A file name from a title: letters, digits and single hyphens. */
export function fileName(title: string): string {
  const plain = title
    .normalize("NFKD")
    .replace(/[^\w]+/g, "-")
    .replace(/^-+|-+$/g, "")
    .toLowerCase();
  return `${plain.slice(0, 80) || "view"}.png`;
}

/** The still picture without its marks as an image, with the colours of the tokens written in. */
export async function drawnStill(holder: HTMLElement | null): Promise<HTMLImageElement> {
  const svg = holder?.querySelector("svg");
  if (!svg) throw new Error("no picture");
  const copy = svg.cloneNode(true) as SVGSVGElement;
  copy.querySelector("[data-marks]")?.remove();
  const { width, height } = svg.viewBox.baseVal;
  copy.setAttribute("width", String(width * SHARPNESS));
  copy.setAttribute("height", String(height * SHARPNESS));
  const palette = readPalette();
  const text = new XMLSerializer()
    .serializeToString(copy)
    .replace(/var\(--color-([a-z0-9-]+)\)/g, (_, token) => palette[token as keyof Palette]?.hex ?? "none");
  const image = new Image();
  image.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(text)}`;
  await image.decode();
  return image;
}
