import { openApiDocument } from "~/services/openapi.server";
import { answerCall, json } from "./answer-call.server";

/** Needs no token: it tells the shapes of calls and nothing of anybody's work. */
export const loader = answerCall({ GET: async () => json(openApiDocument()) });
export const action = loader;
