import { readdir, readFile } from "node:fs/promises";
import path from "node:path";
import { env } from "../../env.server.ts";
import { notFound } from "../http.server.ts";

export interface LocalLetter {
  id: string;
  at: string;
  recipient: string;
  subject: string;
  body: string;
}

const NEWEST = 50;
const NAME = /^[\w-]+\.eml$/;

/**
 * The letters that the local fake keeps, newest first. Only where letters never leave the machine: on loopback and
 * without a mail server. Elsewhere there is no such page.
 *
 * @throws DomainError not-found
 */
export async function readLocalMail(): Promise<LocalLetter[]> {
  if (env().public || env().SMTP_URL) throw notFound();
  const folder = path.resolve(env().DATA_DIRECTORY, "mail");
  const names = await readdir(folder).catch(() => []);
  const newest = names
    .filter((name) => NAME.test(name))
    .toSorted()
    .reverse()
    .slice(0, NEWEST);
  return Promise.all(newest.map((name) => readLetter(folder, name)));
}

async function readLetter(folder: string, name: string): Promise<LocalLetter> {
  const text = await readFile(path.join(folder, name), "utf8");
  const end = text.indexOf("\n\n");
  const head = end < 0 ? text : text.slice(0, end);
  const value = (key: string) =>
    head
      .split("\n")
      .find((line) => line.startsWith(`${key}: `))
      ?.slice(key.length + 2) ?? "";
  const date = new Date(value("Date"));
  return {
    id: name.slice(0, -4),
    at: Number.isNaN(date.getTime()) ? "" : date.toISOString(),
    recipient: value("To"),
    subject: value("Subject"),
    body: end < 0 ? "" : text.slice(end + 2).trim(),
  };
}
