import { onCommandLine } from "../command-line.server.ts";
import { makeTokenByEmail } from "./make-token.server.ts";

/** For a process that makes one token and ends: `scripts/token.mjs`. */
export async function makeTokenOnce(options: Parameters<typeof makeTokenByEmail>[0]): Promise<string> {
  return (await onCommandLine(() => makeTokenByEmail(options))).token;
}
