import { exportSift } from "~/services/sifts/export-sift.server";
import { exportCall } from "./export-call.server";

export const loader = exportCall(exportSift, "json");
export const action = loader;
