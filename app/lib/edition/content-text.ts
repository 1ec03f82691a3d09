import { canonicalJson } from "./canonical-json.ts";
import type { EditionContent } from "./content.ts";

/**
 * The bytes of an edition's content: canonical JSON. Members that content 1 does not have stand in no bytes of it.
 *
 * @example contentText(content) // '{"averages":null,...'
 */
export function contentText(content: EditionContent): string {
  if (content.version > 1) return canonicalJson(content);
  const { uncertainty: _uncertainty, temperatures: _temperatures, open: _open, ...first } = content;
  return canonicalJson(first);
}
