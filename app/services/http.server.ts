import { data } from "react-router";
import { isDatabaseAway } from "../db/driver-errors.server.ts";
import { DomainError, type DomainErrorCode } from "../lib/errors.ts";
import { log } from "./log.server.ts";

const STATUS: Record<DomainErrorCode, number> = {
  "not-found": 404,
  forbidden: 403,
  invalid: 422,
  conflict: 409,
  "too-large": 413,
  unsupported: 415,
  "too-many": 429,
  unavailable: 503,
};

/** Seconds after which a caller may try again, where nothing better is known. */
const RETRY_AFTER_SECONDS = 5;

/** HTTP status of an expected failure. */
export function statusOf(error: DomainError): number {
  const status = error.extra.status;
  return typeof status === "number" ? status : STATUS[error.code];
}

/** What every page and call answers for what does not exist and for what the caller may not know of. */
export function notFound(): DomainError {
  return new DomainError(
    "not-found",
    "Nothing here",
    "This address does not exist, or you have no access to it.",
  );
}

/** For who sees the object but may not do this to it. */
export function forbidden(detail: string): DomainError {
  return new DomainError("forbidden", "Not allowed", detail);
}

/** For a call without a valid token; 401 is no code of the domain. */
export function unauthorized(detail: string): DomainError {
  return new DomainError("forbidden", "Token needed", detail, { extra: { status: 401 } });
}

/** The one form in which unexpected failures reach people: no cause, no stack, an id to quote. */
function unexpected(error: unknown, requestId: string): DomainError {
  log.error({ err: error, requestId }, "unexpected failure");
  return new DomainError(
    "unavailable",
    "This did not work",
    "Something went wrong on the server. Nothing that was acknowledged is lost. Try again; if it happens again, quote the incident.",
    { extra: { status: 500, incident: incidentNumber(requestId) } },
  );
}

/** What pages and calls answer while the database is away; 503 with Retry-After. */
export function databaseAway(cause?: unknown): DomainError {
  return new DomainError(
    "unavailable",
    "The server does not answer",
    "The database is away for the moment. Nothing that was acknowledged is lost. Try again in a few seconds.",
    { cause },
  );
}

/** Short form of a request id that a person can read out: "7F3C-02A9". */
export function incidentNumber(requestId: string): string {
  const plain = requestId.replace(/[^0-9a-z]/gi, "").toUpperCase();
  return `${plain.slice(0, 4)}-${plain.slice(4, 8)}`;
}

/** Any failure as an expected one; what was not expected is logged here, once. */
export function asDomainError(error: unknown, requestId: string): DomainError {
  if (error instanceof DomainError) return error;
  if (!isDatabaseAway(error)) return unexpected(error, requestId);
  log.warn({ err: error, requestId }, "database away");
  return databaseAway(error);
}

/** `application/problem+json` (RFC 9457) of an expected failure. */
export function problemResponse(error: DomainError, headers: HeadersInit = {}): Response {
  const { status: _status, retryAfter, ...extra } = error.extra;
  const status = statusOf(error);
  const answer = new Headers(headers);
  answer.set("content-type", "application/problem+json; charset=utf-8");
  answer.set("cache-control", "no-store");
  if (status === 401) answer.set("www-authenticate", 'Bearer realm="Lowlying"');
  if (status === 429 || status === 503) {
    answer.set("retry-after", String(typeof retryAfter === "number" ? retryAfter : RETRY_AFTER_SECONDS));
  }
  const faults = error.faults.length > 0 ? { errors: error.faults } : {};
  const body = {
    type: `tag:lowlying.example,2026:${status === 401 ? "unauthorized" : status === 500 ? "failure" : error.code}`,
    title: error.title,
    status,
    detail: error.message,
    ...faults,
    ...extra,
  };
  return new Response(JSON.stringify(body), { status, headers: answer });
}

/** Problem document of any failure: what API routes and `/files` answer. */
export function fromDomainError(error: unknown, requestId: string): Response {
  if (error instanceof Response) return error;
  return problemResponse(asDomainError(error, requestId));
}

/** What an error page is told; plain data, nothing of the cause. */
export interface PageErrorData {
  code: DomainErrorCode;
  title: string;
  message: string;
  incident?: string;
}

/** Any failure as what a loader or action throws to reach the nearest error page. */
export function pageError(error: unknown, requestId: string) {
  const known = asDomainError(error, requestId);
  const status = statusOf(known);
  const incident = known.extra.incident;
  const body: PageErrorData = {
    code: known.code,
    title: known.title,
    message: known.message,
    ...(typeof incident === "string" ? { incident } : {}),
  };
  return data(body, { status });
}

/**
 * Runs the service call of a page's loader or action; failures become error pages, redirects pass.
 *
 * @example return forPage(context.get(requestIdContext), () => listSeries({ actor, teamId }))
 */
export async function forPage<Result>(requestId: string, work: () => Promise<Result>): Promise<Result> {
  try {
    return await work();
  } catch (error) {
    if (error instanceof Response || isDataWithStatus(error)) throw error;
    throw pageError(error, requestId);
  }
}

/** What a form shows again when its action was refused: the sentence, and one for each field at fault. */
export interface FormFailure {
  message: string;
  fields: Record<string, string>;
}

/**
 * Answers a form with the refusal that its page can show; everything else goes on to the error page.
 *
 * @param typed what the fields held, to be shown again; never a password
 */
export function refuseForm<Typed extends Record<string, string>>(error: unknown, typed: Typed) {
  if (!(error instanceof DomainError) || error.code === "unavailable") throw error;
  const pairs = error.faults.flatMap(({ field, message }) => (field ? [[field, message] as const] : []));
  const fields: FormFailure["fields"] = Object.fromEntries(pairs);
  const wait = error.extra.retryAfter;
  const headers = typeof wait === "number" ? { "retry-after": String(wait) } : undefined;
  return data({ message: error.message, fields, ...typed }, { status: statusOf(error), headers });
}

/** Runs the service call of an API or file route; failures become problem documents. */
export async function forApi(requestId: string, work: () => Promise<Response>): Promise<Response> {
  try {
    return await work();
  } catch (error) {
    return fromDomainError(error, requestId);
  }
}

/** True for what `data()` made. */
function isDataWithStatus(value: unknown): boolean {
  return typeof value === "object" && value !== null && "init" in value && "data" in value;
}
