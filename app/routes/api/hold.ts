import { holdFrame } from "~/services/ensembles/decide-frame.server";
import { decideCall } from "./decide-call.server";

export const action = decideCall(holdFrame);
export const loader = action;
