import { readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import type { EnsembleAnswer } from "~/lib/api/schemas";
import type { SiftView } from "~/lib/views";
import { startJobs } from "~/services/jobs/run-jobs.server";
import { shutDownJobs } from "~/services/jobs/shutdown.server";
import { buildWorker } from "../../scripts/build-worker.mjs";
import { call } from "../setup/app";
import { makeMember, makeTeam, tokenOf } from "./people";

/** A file that was copied from the reference data. */
export function reference(file: string): Buffer {
  return readFileSync(fileURLToPath(new URL(`../../fixtures/reference/${file}`, import.meta.url)));
}

export interface Sent {
  name: string;
  content: string | Uint8Array;
}

/** A form as curl -F sends it: fields first, then the files. */
export function formOf(files: Sent[], fields: Record<string, string> = {}): FormData {
  const form = new FormData();
  for (const [name, value] of Object.entries(fields)) form.append(name, value);
  for (const { name, content } of files) {
    form.append("file", new Blob([typeof content === "string" ? content : new Uint8Array(content)]), name);
  }
  return form;
}

/** Sends files to the API. */
export function upload(token: string, files: Sent[], fields: Record<string, string> = {}): Promise<Response> {
  return call("/api/v1/ensembles", { method: "POST", token, body: formOf(files, fields) });
}

/** Sends files that must be taken in. */
export async function takenIn(
  token: string,
  files: Sent[],
  fields: Record<string, string> = {},
): Promise<EnsembleAnswer> {
  const response = await upload(token, files, fields);
  const body = await response.json();
  if (response.status !== 201) throw new Error(`${response.status}: ${JSON.stringify(body)}`);
  return body;
}

/** A JSON call. */
export function post(token: string, path: string, body: unknown): Promise<Response> {
  return call(`/api/v1${path}`, {
    method: "POST",
    token,
    body: JSON.stringify(body),
    headers: { "content-type": "application/json" },
  });
}

/** Asks for a sift and waits for its end. */
export async function sifted(token: string, ensembleId: string, request: object): Promise<SiftView> {
  const asked = await post(token, `/ensembles/${ensembleId}/sifts`, request);
  if (asked.status !== 202) throw new Error(`${asked.status}: ${await asked.text()}`);
  const { id } = await asked.json();
  return (await call(`/api/v1/sifts/${id}?wait=60`, { token })).json();
}

/** A team with an analyst and a token of theirs. */
export async function makeLab(name = "A lab") {
  const team = await makeTeam(name);
  const analyst = await makeMember(team.id, "analyst");
  return { team, analyst, token: await tokenOf(analyst.id, team.id) };
}

/** A frame of butane with coordinates of our own making, anti, and a comment. */
export const BUTANE = [
  "C -1.9480 -0.1280 0.0000",
  "C -0.5680 0.5210 0.0000",
  "C 0.5680 -0.5210 0.0000",
  "C 1.9480 0.1280 0.0000",
  "H -2.7400 0.6290 0.0000",
  "H -2.0740 -0.7640 0.8840",
  "H -2.0740 -0.7640 -0.8840",
  "H -0.4680 1.1740 0.8780",
  "H -0.4680 1.1740 -0.8780",
  "H 0.4680 -1.1740 0.8780",
  "H 0.4680 -1.1740 -0.8780",
  "H 2.7400 -0.6290 0.0000",
  "H 2.0740 0.7640 0.8840",
  "H 2.0740 0.7640 -0.8840",
] as const;

/** One frame of XYZ. */
export function frame(comment: string, atoms: readonly string[] = BUTANE): string {
  return `${atoms.length}\n${comment}\n${atoms.join("\n")}\n`;
}

/** Starts the job runner with a freshly built thread; `stop` ends it. */
export async function withJobs(): Promise<{ stop(): Promise<void> }> {
  await buildWorker();
  await startJobs();
  return { stop: shutDownJobs };
}
