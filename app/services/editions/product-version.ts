import { CODE_VERSION } from "../sifts/code-version.ts";

/** As in package.json; a test holds the two together. */
export const PRODUCT_VERSION = "0.1.0";

/** Kept with every edition and every verification: the product, and the computing code where digits hang on it. */
export const EDITION_CODE_VERSION = `${PRODUCT_VERSION}+${CODE_VERSION}`;

/**
 * The version as people read it.
 *
 * @example productVersion("0.1.0+1") // "0.1.0"
 */
export function productVersion(codeVersion: string): string {
  return codeVersion.split("+", 1)[0] ?? codeVersion;
}
