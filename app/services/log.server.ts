import { type DestinationStream, type Logger, pino } from "pino";

/** Keys that never reach the log, wherever they stand in what is logged. */
const SECRET_KEYS = [
  "password",
  "newPassword",
  "token",
  "secret",
  "authorization",
  "cookie",
  "email",
  "recipient",
  "body",
  "subject",
  "text",
  "name",
  "label",
  "comment",
];

/**
 * A path as the log may show it: secrets of links, invitations and mails masked, query left out, since names and selections
 * of unpublished work stand there.
 *
 * @example loggablePath("/reset-password/aF3k") // "/reset-password/***"
 */
export function loggablePath(path: string): string {
  return (
    decoded(path.split("?", 1)[0] ?? path)
      .replace(/^(\/+(?:reset-password|e|invitation|confirm-address|restore-account)\/+)[^/]+/i, "$1***")
      // The form of a link's secret, wherever somebody pastes it.
      .replace(/[a-z2-7]{32}/g, "***")
      .slice(0, 300)
  );
}

/** The router reads "/%65/" as "/e/", so the mask must too. */
function decoded(path: string): string {
  try {
    return decodeURI(path);
  } catch {
    return path;
  }
}

/**
 * What is told of a failure: kind, code, message and stack. Messages of the database driver hold the statement with
 * its values, so only their code and the stack's places are kept.
 */
export function loggableError(error: unknown): Record<string, unknown> {
  if (!(error instanceof Error)) return { kind: typeof error };
  const cause = error.cause instanceof Error ? loggableError(error.cause) : undefined;
  const { code, sql, query } = error as { code?: unknown; sql?: unknown; query?: unknown };
  const fromDriver = sql !== undefined || query !== undefined || String(code).startsWith("ER_");
  const places = (error.stack ?? "").split("\n").filter((line) => /^\s+at /.test(line));
  return {
    kind: error.name,
    ...(typeof code === "string" ? { code } : {}),
    ...(fromDriver ? {} : { message: error.message.slice(0, 500) }),
    stack: places.slice(0, 12).map((line) => line.trim()),
    ...(cause ? { cause } : {}),
  };
}

/** One JSON object a line; line breaks in values are escaped by JSON itself. */
export function makeLog(options: { level?: string; destination?: DestinationStream } = {}): Logger {
  const settings = {
    level: options.level ?? process.env.LOG_LEVEL ?? "info",
    base: null,
    timestamp: () => `,"time":"${new Date().toISOString()}"`,
    formatters: { level: (level: string) => ({ level }) },
    serializers: { err: loggableError },
    redact: {
      paths: SECRET_KEYS.flatMap((key) => [key, `*.${key}`, `*.*.${key}`]),
      censor: "***",
    },
  };
  return options.destination ? pino(settings, options.destination) : pino(settings);
}

export const log = makeLog();
