import { DomainError } from "~/lib/errors";

/**
 * The fields that a form of a page sent.
 *
 * @throws DomainError 415 for a body that is no form, 400 for one that does not parse, 413 beyond the limit of bytes
 */
export async function readForm(request: Request): Promise<FormData> {
  const type = request.headers.get("content-type") ?? "";
  if (!/^(multipart\/form-data|application\/x-www-form-urlencoded)\b/i.test(type)) {
    throw new DomainError("unsupported", "No form", "This address takes what the form of its page sends.");
  }
  try {
    return await request.formData();
  } catch (error) {
    for (const cause of [error, error instanceof Error ? error.cause : undefined]) {
      if (cause instanceof DomainError) throw cause;
    }
    throw new DomainError(
      "invalid",
      "The form is broken",
      "What was sent does not read as a form. Send it again.",
      {
        extra: { status: 400 },
      },
    );
  }
}
