import type { IntakeMessage } from "./report.ts";

/**
 * A message as one line of text: place, what is so, what was found, what to do.
 *
 * @example
 * formatMessage({ code: "X22", severity: "hold", file: "run3.xyz", line: 1043, frame: 17, atom: 12,
 *   found: "1,234", message: "The y coordinate is not a number.", hint: "Decimal comma?" })
 * // run3.xyz, line 1043, frame 17, atom 12: the y coordinate is not a number ("1,234"). Decimal comma?
 */
export function formatMessage(message: IntakeMessage): string {
  const place = [message.file];
  if (message.line !== undefined) place.push(`line ${message.line}`);
  if (message.frame !== undefined) place.push(`frame ${message.frame}`);
  if (message.atom !== undefined) place.push(`atom ${message.atom}`);
  let text = lowerFirst(message.message);
  if (message.found !== undefined) text = withFound(text, message.found);
  const hint = message.hint === undefined ? "" : ` ${message.hint}`;
  return `${place.join(", ")}: ${text}${hint}`;
}

/** Lower case after the colon, but for symbols and abbreviations ("XYZ", "C4"). */
function lowerFirst(text: string): string {
  return /^[A-Z](?:[a-z](?!\d)| )/.test(text) ? text.slice(0, 1).toLowerCase() + text.slice(1) : text;
}

function withFound(text: string, found: string): string {
  const end = /[.?!]$/.exec(text)?.[0] ?? ".";
  return `${text.replace(/[.?!]$/, "")} ("${found}")${end}`;
}
