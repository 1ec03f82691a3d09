import { exportCall } from "./export-call.server";

export const loader = exportCall("csv");
export const action = loader;
