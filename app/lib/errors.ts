/** What went wrong in terms a caller can act on; adapters map codes to HTTP statuses. */
export type DomainErrorCode =
  | "not-found"
  | "forbidden"
  | "invalid"
  | "conflict"
  | "too-large"
  | "unsupported"
  | "too-many"
  | "unavailable";

/** One thing at fault: a field of a request, or a place in a file. Lines, frames and atoms count from 1. */
export interface Fault {
  field?: string;
  file?: string;
  frame?: number;
  line?: number;
  message: string;
}

/**
 * An expected failure. `message` is for people: what was found, what was expected, what to do.
 * `faults` become `errors[]` of the problem document; `extra` its further members.
 */
export class DomainError extends Error {
  readonly code: DomainErrorCode;
  readonly title: string;
  readonly faults: readonly Fault[];
  readonly extra: Readonly<Record<string, unknown>>;

  constructor(
    code: DomainErrorCode,
    title: string,
    detail: string,
    options: { faults?: readonly Fault[]; extra?: Record<string, unknown>; cause?: unknown } = {},
  ) {
    super(detail, { cause: options.cause });
    this.name = "DomainError";
    this.code = code;
    this.title = title;
    this.faults = options.faults ?? [];
    this.extra = options.extra ?? {};
  }
}
