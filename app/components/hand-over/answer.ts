/** What the Hand-over section answers to its forms. */
export interface HandOverAnswer {
  ok?: true;
  /** Why it was refused. */
  message?: string;
  /** By field of the form. */
  fields?: Record<string, string>;
  /** Number of the edition that was frozen. */
  frozen?: number;
  /** The link that was made: its address is shown this once. */
  made?: { address: string; label: string; endsAt: string; edition: number; mailedTo: string | null };
}
