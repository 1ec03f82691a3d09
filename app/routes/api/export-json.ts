import { exportCall } from "./export-call.server";

export const loader = exportCall("json");
export const action = loader;
