import { z } from "zod";

/** An address that never leaves the machine: demo accounts and plain http are fine there. */
export function isLoopback(origin: string): boolean {
  const host = URL.canParse(origin) ? new URL(origin).hostname : "";
  return host === "localhost" || host === "[::1]" || /^127(\.\d{1,3}){3}$/.test(host);
}

const MEBIBYTE = 2 ** 20;

const blankIsAbsent = (value: unknown) => (value === "" ? undefined : value);
const flag = z.preprocess(
  blankIsAbsent,
  z
    .enum(["0", "1", "true", "false"], { error: "must be 1 or 0" })
    .default("0")
    .transform((value) => value === "1" || value === "true"),
);
const count = (fallback: number, least = 1, most = Number.MAX_SAFE_INTEGER) =>
  z.preprocess(
    blankIsAbsent,
    z.coerce
      .number({ error: `must be a whole number from ${least} to ${most}` })
      .int(`must be a whole number from ${least} to ${most}`)
      .min(least, `must be at least ${least}`)
      .max(most, `must be at most ${most}`)
      .default(fallback),
  );
const text = <Schema extends z.ZodType>(schema: Schema) => z.preprocess(blankIsAbsent, schema);

const schema = z
  .object({
    NODE_ENV: text(z.enum(["production", "development", "test"]).default("development")),
    HOST: text(z.string().default("127.0.0.1")),
    PORT: count(3000, 1, 65535),
    /** Where people reach the application; decides cookies, mail links and which pages may send forms. */
    APP_ORIGIN: text(
      z
        .url({ protocol: /^https?$/, error: "must be an address such as https://lowlying.example" })
        .transform((value) => new URL(value).origin)
        .optional(),
    ),
    DATABASE_URL: text(
      z.string({ error: "is missing" }).regex(/^(mysql|mariadb):\/\//, "must begin with mysql://"),
    ),
    /** The account that owns the tables, where the application's own may only read and write rows. */
    DATABASE_MIGRATION_URL: text(
      z
        .string()
        .regex(/^(mysql|mariadb):\/\//, "must begin with mysql://")
        .optional(),
    ),
    /** `relaxed` lets throw-away servers of tests run without durable settings. */
    DATABASE_DURABILITY: text(z.enum(["full", "relaxed"]).default("full")),
    /** Signs the session cookie; two keys with a comma between them are both accepted, the first one signs. */
    SESSION_SECRET: text(
      z
        .string()
        .transform((value) => value.split(",").map((key) => key.trim()))
        .refine((keys) => keys.every((key) => key.length >= 32), "needs at least 32 characters a key")
        .optional(),
    ),
    OPEN_SIGN_UP: flag,
    /** Password of the demo accounts; `npm start` makes one and keeps it in `.data`. */
    DEMO_PASSWORD: text(z.string().min(12, "needs at least 12 characters").optional()),
    SMTP_URL: text(
      z
        .string()
        .regex(/^smtps?:\/\//, "must begin with smtp:// or smtps://")
        .optional(),
    ),
    MAIL_FROM: text(z.string().max(254).default("Lowlying <no-reply@lowlying.example>")),
    /** Folder of what the application writes itself beside the database: mail of the local fake. */
    DATA_DIRECTORY: text(z.string().default(".data")),
    MIGRATIONS_DIRECTORY: text(z.string().default("drizzle")),
    /** Where `scripts/build-worker.mjs` puts the thread entry and the server finds it. */
    WORKER_DIRECTORY: text(z.string().default(".worker")),
    MAX_FILE_BYTES: count(512 * MEBIBYTE),
    MAX_FRAMES: count(50_000),
    MAX_ATOMS: count(1_000),
    /** Further quantities that the comments and data fields of an upload may bring. */
    MAX_COLUMNS: count(200, 0),
    TEAM_QUOTA_BYTES: count(20e9),
    API_CALLS_PER_MINUTE: count(1_200),
    API_UPLOADS_PER_MINUTE: count(240),
    /** Calls without a valid token, an address. */
    ANONYMOUS_CALLS_PER_MINUTE: count(600),
    /** Seconds that a small body may take in all. */
    SMALL_BODY_SECONDS: count(30),
    /** Least bytes of an upload in each span of so many seconds: about a kilobyte a second. */
    SLOW_UPLOAD_SECONDS: count(60),
    SLOW_UPLOAD_BYTES: count(65_536, 0),
    /** How many proxies of ours stand in front: 0 takes the peer's address, 1 the last of X-Forwarded-For, ... */
    TRUST_PROXY: count(0, 0, 10),
    /** 0 means one less than the machine has processors, at least 1. */
    WORKER_THREADS: count(0, 0, 64),
    LOG_LEVEL: text(z.enum(["trace", "debug", "info", "warn", "error", "fatal", "silent"]).default("info")),
    /** Cost of password hashing in KiB; tests make it cheap, nothing below the default is accepted in production. */
    ARGON2_MEMORY_KIB: count(19_456, 1_024, 1_048_576),
  })
  .transform((raw) => {
    const origin = raw.APP_ORIGIN ?? `http://127.0.0.1:${raw.PORT}`;
    return {
      ...raw,
      APP_ORIGIN: origin,
      /** Production for strangers: no demo accounts, secrets must be given. */
      public: raw.NODE_ENV === "production" && !isLoopback(origin),
      secure: origin.startsWith("https://"),
    };
  })
  .superRefine((value, context) => {
    const need = (condition: boolean, path: string, message: string) => {
      if (!condition) context.addIssue({ code: "custom", path: [path], message });
    };
    if (!value.public) return;
    const secret = value.SESSION_SECRET !== undefined;
    need(secret, "SESSION_SECRET", "is missing; in production give at least 32 random characters");
    need(value.ARGON2_MEMORY_KIB >= 19_456, "ARGON2_MEMORY_KIB", "must be at least 19456 in production");
    need(value.DATABASE_DURABILITY === "full", "DATABASE_DURABILITY", "must be full in production");
  });

export type Env = z.infer<typeof schema>;

/** Wrong or missing settings; the message names every one of them, never a value. */
export class EnvError extends Error {
  override name = "EnvError";
}

/**
 * Checks the environment.
 *
 * @throws EnvError that names every bad key at once
 * @example readEnv({ DATABASE_URL: "mysql://u:p@127.0.0.1/lowlying" }).PORT // 3000
 */
export function readEnv(source: Record<string, string | undefined>): Env {
  const parsed = schema.safeParse(source);
  if (parsed.success) return parsed.data;
  const lines = parsed.error.issues.map((issue) => `  ${issue.path.join(".")} ${issue.message}`);
  throw new EnvError(`These settings are not right:\n${lines.join("\n")}\n.env.example lists them all.`);
}

let checked: Env | undefined;

/** The checked environment of this process; read once. */
export function env(): Env {
  checked ??= readEnv(process.env);
  return checked;
}
