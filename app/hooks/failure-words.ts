/** A failed call in words for people: a browser's own "Failed to fetch" says nothing to anybody. */
export function failureWords(error: unknown): string {
  if (error instanceof TypeError)
    return "The server does not answer. What is shown stays; try again in a moment.";
  return error instanceof Error ? error.message : "This did not work. Try again.";
}
