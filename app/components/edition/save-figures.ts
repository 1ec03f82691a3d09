import { writeZip, type ZipEntry } from "~/lib/export/zip";

/** Pixels of a PNG for one of its SVG. */
const SHARPNESS = 3;

/**
 * Fetches the figures of an edition, draws each as a PNG too, and hands all to the reader as one zip with their checksums.
 * The SVG files are the bytes that were frozen; the PNG files are what this browser makes of them.
 *
 * @throws Error where one cannot be fetched or drawn
 */
export async function saveFigures(options: {
  figures: readonly { name: string; address: string }[];
  called: string;
}): Promise<void> {
  const entries: ZipEntry[] = [];
  for (const { name, address } of options.figures) {
    const response = await fetch(address);
    if (!response.ok) throw new Error(String(response.status));
    const svg = new Uint8Array(await response.arrayBuffer());
    entries.push({ name, data: svg });
    entries.push({ name: name.replace(/\.svg$/, ".png"), data: await drawn(new TextDecoder().decode(svg)) });
  }
  const list = await checksums(entries);
  if (list !== null) entries.push({ name: "SHA256SUMS", data: new TextEncoder().encode(list) });
  const zip = new Blob(
    [...writeZip(entries)].map((piece) => new Uint8Array(piece)),
    { type: "application/zip" },
  );
  const link = document.createElement("a");
  link.href = URL.createObjectURL(zip);
  link.download = `${options.called}.zip`;
  link.click();
  // Chromium reads the address after the click has returned.
  setTimeout(() => URL.revokeObjectURL(link.href), 1000);
}

async function drawn(svg: string): Promise<Uint8Array> {
  const image = new Image();
  // The policy of the page allows pictures of its own and data, no other addresses.
  image.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(svg)}`;
  await image.decode();
  const canvas = document.createElement("canvas");
  canvas.width = SHARPNESS * image.naturalWidth;
  canvas.height = SHARPNESS * image.naturalHeight;
  canvas.getContext("2d")?.drawImage(image, 0, 0, canvas.width, canvas.height);
  const png = await new Promise<Blob | null>((done) => canvas.toBlob(done, "image/png"));
  if (png === null) throw new Error("no picture");
  return new Uint8Array(await png.arrayBuffer());
}

/** As `sha256sum` writes and checks them; null where the browser hashes nothing, as over plain http. */
async function checksums(entries: readonly ZipEntry[]): Promise<string | null> {
  if (!globalThis.crypto?.subtle) return null;
  const lines = await Promise.all(
    entries.map(async ({ name, data }) => {
      const hash = new Uint8Array(await crypto.subtle.digest("SHA-256", new Uint8Array(data)));
      const hex = [...hash].map((byte) => byte.toString(16).padStart(2, "0")).join("");
      return `${hex}  ${name}\n`;
    }),
  );
  return lines.join("");
}
