import type { ColumnsPreview } from "../../lib/api/schemas.ts";
import type { IntakeMessage, IntakeQuestion } from "../../lib/intake/report.ts";
import type { ColumnToStore } from "./store-column.server.ts";

/** One column of a file as it would be kept, with what the page says of it. */
export interface PlannedToStore extends ColumnToStore {
  /** From 1 in a table. */
  column: number | null;
  header: string;
  why: string;
  /** A property that is probably an energy, and nobody has said which. */
  looksLikeEnergy?: boolean;
}

/** What a file would become: a table or structures, the same from here on. */
export interface FilePlan {
  type: "table" | "structures";
  delimiter: string | null;
  header: string[];
  rows: string[][];
  columns: PlannedToStore[];
  leftOut: ColumnsPreview["leftOut"];
  match: ColumnsPreview["match"];
  questions: IntakeQuestion[];
  messages: IntakeMessage[];
}
