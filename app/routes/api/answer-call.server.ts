import type { RouterContextProvider } from "react-router";
import type { z } from "zod";
import { actorContext, requestIdContext } from "~/context";
import { faultsOf } from "~/lib/api/fault-words";
import { DomainError } from "~/lib/errors";
import type { Actor } from "~/services/auth/access.server";
import { forApi } from "~/services/http.server";

/** What a call is given; `params` and `url` as the router reads them. */
export interface Call {
  actor: Actor;
  request: Request;
  url: URL;
  params: Record<string, string | undefined>;
}

type Method = "GET" | "POST" | "DELETE";
type Answers = Partial<Record<Method, (call: Call) => Promise<Response>>>;

interface RouteArgs {
  request: Request;
  url: URL;
  params: Record<string, string | undefined>;
  context: Readonly<RouterContextProvider>;
}

function methodNotAllowed(method: string, answers: Answers): DomainError {
  const allowed = Object.keys(answers).join(", ");
  return new DomainError("invalid", "Method not allowed", `${method} is not known here; ${allowed} is.`, {
    extra: { status: 405 },
  });
}

/**
 * One function for loader and action of a call: the answer by method, failures as problem documents, any other method
 * 405 with what is allowed.
 *
 * @example export const loader = answerCall({ GET: ({ actor, params }) => ... });
 */
export function answerCall(answers: Answers): (args: RouteArgs) => Promise<Response> {
  return async ({ request, url, params, context }) => {
    // A HEAD is a GET whose body the server leaves out.
    const method = request.method === "HEAD" ? "GET" : request.method;
    const answer = Object.hasOwn(answers, method) ? answers[method as Method] : undefined;
    const response = await forApi(context.get(requestIdContext), async () => {
      if (!answer) throw methodNotAllowed(request.method, answers);
      return answer({ actor: context.get(actorContext), request, url, params });
    });
    if (response.status === 405) response.headers.set("allow", Object.keys(answers).join(", "));
    return response;
  };
}

function invalid(title: string, error: z.ZodError): DomainError {
  const faults = faultsOf(error);
  const words = faults.map(({ field, message }) => (field === undefined ? message : `${field}: ${message}`));
  return new DomainError("invalid", title, words.join(" "), { faults });
}

/** Checks data against a schema; 422 that names every field at fault. */
export function check<Schema extends z.ZodType>(
  schema: Schema,
  data: unknown,
  title: string,
): z.infer<Schema> {
  const parsed = schema.safeParse(data, { reportInput: true });
  if (!parsed.success) throw invalid(title, parsed.error);
  return parsed.data;
}

/** The options of an address, each once; unknown ones are passed over. */
export function readQuery<Schema extends z.ZodObject>(url: URL, schema: Schema): z.infer<Schema> {
  const title = "An option of the address is not right";
  const faults = Object.keys(schema.shape)
    .filter((field) => url.searchParams.getAll(field).length > 1)
    .map((field) => ({ field, message: `"${field}" stands in the address more than once; give it once.` }));
  if (faults.length > 0) {
    throw new DomainError("invalid", title, faults.map(({ message }) => message).join(" "), { faults });
  }
  return check(schema, Object.fromEntries(url.searchParams), title);
}

/** Bodies are taken as they are: a packed one would only seem to be broken. */
function refusePacked(request: Request): void {
  const packing = request.headers.get("content-encoding")?.trim() ?? "identity";
  if (/^(identity)?$/i.test(packing)) return;
  throw new DomainError(
    "unsupported",
    "Packed bodies are not read",
    `Send the body unpacked; found "${packing.slice(0, 40)}" as its content-encoding. Files may be packed with gzip themselves.`,
  );
}

/** A JSON body: 415 for another content type, 400 where it does not parse, 422 where it does not fit. */
export async function readJson<Schema extends z.ZodType>(
  request: Request,
  schema: Schema,
): Promise<z.infer<Schema>> {
  const type = request.headers.get("content-type");
  if (!/^application\/json\s*(;|$)/i.test(type ?? "")) {
    throw new DomainError(
      "unsupported",
      "JSON expected",
      `Send the body as "application/json"; found ${type ?? "no content type"}.`,
    );
  }
  refusePacked(request);
  const text = await request.text();
  let data: unknown;
  try {
    data = JSON.parse(text);
  } catch {
    throw new DomainError("invalid", "The body is no JSON", "The body does not parse as JSON.", {
      extra: { status: 400 },
    });
  }
  return check(schema, data, "The request is not right");
}

/** A JSON body, or the same fields as a form sends them. */
export async function readJsonOrForm<Schema extends z.ZodType>(
  request: Request,
  schema: Schema,
): Promise<z.infer<Schema>> {
  const type = request.headers.get("content-type") ?? "";
  if (!/^(multipart\/form-data|application\/x-www-form-urlencoded)\b/i.test(type)) {
    return readJson(request, schema);
  }
  refusePacked(request);
  const form = await request.formData().catch(() => {
    throw new DomainError("invalid", "The form is broken", "The form does not parse.", {
      extra: { status: 400 },
    });
  });
  const sent = [...form].filter(([, value]) => value !== "");
  return check(schema, Object.fromEntries(sent), "The request is not right");
}

/** A JSON answer. */
export function json(body: unknown, init: { status?: number; location?: string } = {}): Response {
  const headers = new Headers(init.location === undefined ? {} : { location: init.location });
  return Response.json(body, { status: init.status ?? 200, headers });
}
