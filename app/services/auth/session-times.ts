/** A session that nobody uses ends after this, unless its user asked to stay signed in on the computer. */
export const SESSION_IDLE_SECONDS = 12 * 3600;

/** Every session ends after this. */
export const SESSION_ABSOLUTE_SECONDS = 30 * 86_400;
