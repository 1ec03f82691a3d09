import greek from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-greek-400-normal.woff2?url";
import regular from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-400-normal.woff2?url";
import medium from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-500-normal.woff2?url";
import semibold from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-600-normal.woff2?url";

const FACES = [
  { url: regular, weight: 400, range: "" },
  { url: medium, weight: 500, range: "" },
  { url: semibold, weight: 600, range: "" },
  { url: greek, weight: 400, range: "U+0370-03FF" },
];

let loaded: Promise<string> | null = null;

/**
 * The typeface of the page as style rules that hold it: a drawing that the browser turns into pixels sees no font of the
 * page. Fetched once, from the browser's own store.
 */
export function fontRules(): Promise<string> {
  loaded ??= Promise.all(FACES.map(faceRule)).then((rules) => rules.join("\n"));
  return loaded;
}

async function faceRule({ url, weight, range }: (typeof FACES)[number]): Promise<string> {
  try {
    const bytes = new Uint8Array(await (await fetch(url)).arrayBuffer());
    let text = "";
    for (const byte of bytes) text += String.fromCharCode(byte);
    const source = `url(data:font/woff2;base64,${btoa(text)}) format("woff2")`;
    const only = range === "" ? "" : `unicode-range:${range};`;
    return `@font-face{font-family:"IBM Plex Sans";font-weight:${weight};${only}src:${source}}`;
  } catch {
    // Without its typeface the drawing is still right.
    return "";
  }
}
