/** Days in which what was deleted (an ensemble, a team, an account) can be brought back. */
export const UNDO_DAYS = 30;
