import type { EnsembleAnswer } from "~/lib/api/schemas";
import type { Refusal, Taken } from "./upload-list";

/** What goes along with the files of one upload. */
export interface UploadForm {
  /** Where to: POST /files/upload makes an ensemble. */
  action: string;
  fields: Readonly<Record<string, string>>;
  files: readonly File[];
}

export type UploadEnd =
  | { kind: "taken"; taken: Taken }
  | { kind: "refused"; refusal: Refusal }
  | { kind: "failed" };

/**
 * Sends files as one multipart form. XMLHttpRequest, since fetch tells nothing of the bytes that left. Meanwhile it asks
 * how many frames were read.
 *
 * @returns a way to stop it; nothing is called after that
 */
export function sendUpload(
  form: UploadForm,
  onProgress: (sent: number) => void,
  onFrames: (frames: number) => void,
  onEnd: (end: UploadEnd) => void,
): () => void {
  const body = new FormData();
  // Fields first: the server reads the form as a stream and needs them before the first file.
  for (const [name, value] of Object.entries(form.fields)) body.append(name, value);
  for (const file of form.files) body.append("file", file, file.name);

  const request = new XMLHttpRequest();
  request.open("POST", form.action);
  request.setRequestHeader("Accept", "application/json");
  const key = newKey();
  request.setRequestHeader("Upload-Key", key);
  const asking = setInterval(() => void askFrames(key, onFrames), FRAMES_EVERY_MS);
  request.addEventListener("loadend", () => clearInterval(asking));
  request.upload.addEventListener("progress", (event) => onProgress(event.loaded));
  request.addEventListener("error", () => onEnd({ kind: "failed" }));
  request.addEventListener("load", () => onEnd(readAnswer(request.status, request.responseText)));
  request.send(body);
  return () => request.abort();
}

/** How often the frames are asked for. */
const FRAMES_EVERY_MS = 400;

/** 32 digits by chance; `crypto.randomUUID` is missing where the page came without https from another host. */
function newKey(): string {
  const bytes = crypto.getRandomValues(new Uint8Array(16));
  return Array.from(bytes, (byte) => byte.toString(16).padStart(2, "0")).join("");
}

/** Nothing is told before the first file arrives, and after the last answer. */
async function askFrames(key: string, onFrames: (frames: number) => void): Promise<void> {
  try {
    const answer = await fetch(`/files/upload?key=${key}`, { headers: { accept: "application/json" } });
    if (!answer.ok) return;
    const { frames } = (await answer.json()) as { frames: number | null };
    if (frames !== null) onFrames(frames);
  } catch {
    // The upload itself says when the connection is lost.
  }
}

/** The server's answer as the row shows it; anything that is neither an ensemble nor a problem counts as a lost connection. */
export function readAnswer(status: number, text: string): UploadEnd {
  let answer: unknown;
  try {
    answer = JSON.parse(text);
  } catch {
    return { kind: "failed" };
  }
  if (typeof answer !== "object" || answer === null) return { kind: "failed" };
  if (status === 200 || status === 201) {
    const { id, name, intake } = answer as EnsembleAnswer;
    const { frames, accepted, remarked, held, questions } = intake;
    const already = status === 200;
    return {
      kind: "taken",
      taken: { id, name, frames, accepted, remarked, held, questions: questions.length, already },
    };
  }
  if (status < 400) return { kind: "failed" };
  const problem = answer as {
    title?: string;
    detail?: string;
    errors?: Refusal["faults"];
    existing?: string;
  };
  return {
    kind: "refused",
    refusal: {
      title: problem.title ?? "Refused",
      detail: problem.detail ?? null,
      faults: problem.errors ?? [],
      existing: problem.existing ?? null,
    },
  };
}
