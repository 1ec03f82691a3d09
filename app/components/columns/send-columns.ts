import type { ColumnsPreview } from "~/lib/api/schemas";

/** What goes along with a file of columns: answers, and choices for single columns. */
export interface ColumnsForm {
  ensembleId: string;
  file: File;
  fields: Readonly<Record<string, string>>;
  choices: readonly ColumnChoiceField[];
}

export interface ColumnChoiceField {
  column: number;
  use?: boolean;
  name?: string;
  unit?: string;
  kind?: "energy" | "property";
  atom?: number | null;
}

export interface Refused {
  title: string;
  detail: string;
  /** Row of the formats that refuses, where it is one. */
  code?: string;
}

export type ColumnsAnswer<Body> = { ok: true; body: Body } | { ok: false; refused: Refused };

const LOST: Refused = {
  title: "The server does not answer",
  detail: "Nothing was stored. The file is still here: try again.",
};

async function send<Body>(form: ColumnsForm, extra: Record<string, string>): Promise<ColumnsAnswer<Body>> {
  const body = new FormData();
  const fields = { ...form.fields, ...extra };
  for (const [name, value] of Object.entries(fields)) if (value !== "") body.append(name, value);
  if (form.choices.length > 0) body.append("columns", JSON.stringify(form.choices));
  body.append("file", form.file, form.file.name);
  try {
    const response = await fetch(`/files/ensembles/${form.ensembleId}/columns`, {
      method: "POST",
      body,
      headers: { accept: "application/json" },
    });
    const answer: unknown = await response.json();
    if (response.ok) return { ok: true, body: answer as Body };
    const { title, detail, code } = answer as { title?: string; detail?: string; code?: string };
    return { ok: false, refused: { title: title ?? LOST.title, detail: detail ?? LOST.detail, code } };
  } catch {
    return { ok: false, refused: LOST };
  }
}

/** What the file would become; nothing is kept. */
export function previewColumns(form: ColumnsForm): Promise<ColumnsAnswer<ColumnsPreview>> {
  return send(form, { preview: "true" });
}

/** Keeps the columns. */
export function saveColumns(
  form: ColumnsForm,
): Promise<ColumnsAnswer<{ columns: { id: string; name: string; count: number }[] }>> {
  return send(form, {});
}
