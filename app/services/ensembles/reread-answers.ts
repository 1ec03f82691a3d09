import type { RereadRequest } from "../../lib/api/schemas.ts";
import type { WrittenAnswers } from "./complete-reading.server.ts";

/** Answers of a request to read again, as they are kept: what is left out is open again. */
export function rereadAnswers(asked: RereadRequest): { answers: WrittenAnswers; kindStated: boolean } {
  const kindStated = asked.energyKind !== undefined;
  return {
    answers: {
      energyUnit: asked.energyUnit ?? null,
      energyFrom: asked.energyFrom ?? null,
      level: asked.level ?? null,
      energyKind: asked.energyKind ?? "electronic",
      energyTemperature: asked.energyTemperature ?? null,
      ...(kindStated ? { kindStated: true } : {}),
    },
    kindStated,
  };
}
