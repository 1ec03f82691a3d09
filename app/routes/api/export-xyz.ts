import { exportCall } from "./export-call.server";

export const loader = exportCall("xyz");
export const action = loader;
