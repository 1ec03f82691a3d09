import { buildContent, type EditionSource, uncertaintyInput } from "../../lib/edition/build.ts";
import type { EditionContent } from "../../lib/edition/content.ts";
import { drawUncertainty } from "../../lib/edition/uncertainty.ts";
import { computeDraws, workerBundleExists } from "../jobs/pool.server.ts";

/** The content of an edition; what chance makes of it is drawn in a thread, so that others are served meanwhile. */
export async function drawContent(source: EditionSource): Promise<EditionContent> {
  const input = uncertaintyInput(source);
  if (input === null) return buildContent(source, null);
  // The command line may run where no thread entry was built: the digits are the same.
  const drawn = workerBundleExists() ? await computeDraws(input) : drawUncertainty(input);
  return buildContent(source, drawn);
}
