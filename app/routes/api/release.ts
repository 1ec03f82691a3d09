import { releaseFrame } from "~/services/ensembles/decide-frame.server";
import { decideCall } from "./decide-call.server";

export const action = decideCall(releaseFrame);
export const loader = action;
