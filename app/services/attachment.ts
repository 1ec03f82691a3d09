/** Names that Windows keeps for devices, whatever follows the dot. */
const DEVICE = /^(con|prn|aux|nul|com\d|lpt\d)(\.|$)/i;
const LONGEST = 120;

/**
 * A file name that every system takes: no path, no control or direction characters, no device, never empty.
 *
 * @example safeFileName("../con.xyz") // "_con.xyz"
 */
export function safeFileName(name: string): string {
  const base = name.split(/[/\\]/).pop() ?? "";
  const plain = base
    .normalize("NFC")
    // Control, format (direction marks) and surrogate characters, and those that file systems or shells give a meaning.
    .replace(/[\p{Cc}\p{Cf}\p{Cs}\p{Co}\p{Zl}\p{Zp}<>:"|?*%]/gu, "_")
    .replace(/^[.\s]+|[.\s]+$/g, "");
  const [stem, ending] = splitEnding(plain);
  const cut = [...stem].slice(0, LONGEST - ending.length).join("") + ending;
  if (cut === "") return "file";
  return DEVICE.test(cut) ? `_${cut}` : cut;
}

function splitEnding(name: string): [string, string] {
  const match = /(\.[A-Za-z0-9]{1,8}){1,2}$/.exec(name);
  return match && match.index > 0 ? [name.slice(0, match.index), match[0]] : [name, ""];
}

/**
 * `Content-Disposition` of a download (RFC 6266): a plain ASCII name for old programs, the real one in UTF-8.
 *
 * @example attachment("ü.csv") // attachment; filename="_.csv"; filename*=UTF-8''%C3%BC.csv
 */
export function attachment(name: string): string {
  const safe = safeFileName(name);
  const ascii = safe.replace(/[^\x20-\x7e]/g, "_").replace(/["\\]/g, "_");
  const encoded = encodeURIComponent(safe).replace(
    /['()*]/g,
    (c) => `%${c.charCodeAt(0).toString(16).toUpperCase()}`,
  );
  return `attachment; filename="${ascii}"; filename*=UTF-8''${encoded}`;
}
