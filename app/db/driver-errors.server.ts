/** The driver's code of a failed statement, found behind the wrappers: "ER_DUP_ENTRY", "ECONNREFUSED", ... */
export function driverCode(error: unknown): string | null {
  for (let at = error, depth = 0; at instanceof Error && depth < 6; at = at.cause, depth++) {
    const code = (at as { code?: unknown }).code;
    if (typeof code === "string" && /^(ER_|E[A-Z]{3,}$|EAI_|PROTOCOL_|POOL_)/.test(code)) return code;
  }
  return null;
}

/** True where a unique key refused the row. */
export function isDuplicate(error: unknown): boolean {
  return driverCode(error) === "ER_DUP_ENTRY";
}

const AWAY =
  /^(ECONN|ENOTFOUND|ETIMEDOUT|EPIPE|EHOSTUNREACH|EAI_|PROTOCOL_|POOL_|ER_CON_COUNT|ER_SERVER_SHUTDOWN|ER_CONNECTION_KILLED)/;

/** True where the database did not answer, as opposed to refusing the statement. */
export function isDatabaseAway(error: unknown): boolean {
  const code = driverCode(error);
  return code !== null && AWAY.test(code);
}
