/** What an act of the workbench answers to its form. */
export interface ActAnswer {
  /** Absent where the server refused: then `message` says why. */
  ok?: boolean;
  /** What to do differently, where it was refused. */
  message?: string;
  /** Done: what, for the toast. */
  done?: {
    intent: string;
    frame?: number;
    reason?: string;
    /** The column that came of it. */
    column?: { id: string; name: string };
    /** The ensemble that came of it; `created` is false where it was here before. */
    made?: { ensembleId: string; name: string; frames: number; created: boolean };
  };
}
