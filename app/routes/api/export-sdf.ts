import { exportSift } from "~/services/sifts/export-sift.server";
import { exportCall } from "./export-call.server";

export const loader = exportCall(exportSift, "sdf");
export const action = loader;
