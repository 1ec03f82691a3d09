/** What an act of the workbench answers to its form. */
export interface ActAnswer {
  ok: boolean;
  /** What to do differently, where it was refused. */
  message?: string;
  /** Done: what, for the toast. */
  done?: { intent: string; frame?: number; reason?: string };
}
