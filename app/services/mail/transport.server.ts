import { mkdir, rename, writeFile } from "node:fs/promises";
import path from "node:path";
import { createTransport } from "nodemailer";
import { env } from "../../env.server.ts";
import type { Letter } from "./queue-mail.server.ts";

const TIME_OUT_MS = 20_000;

const escapeHtml = (text: string) => text.replace(/[&<>"']/g, (c) => `&#${c.charCodeAt(0)};`);

/** The text as HTML: paragraphs, and addresses on a line of their own as links. */
export function letterHtml(body: string): string {
  const paragraphs = body.split(/\n{2,}/).map((paragraph) => {
    const lines = paragraph.split("\n").map((line) => {
      const safe = escapeHtml(line);
      return /^https?:\/\/\S+$/.test(line) ? `<a href="${safe}">${safe}</a>` : safe;
    });
    return `<p>${lines.join("<br>")}</p>`;
  });
  return `<!doctype html><html lang="en"><body style="font-family:sans-serif">${paragraphs.join("")}</body></html>`;
}

const headerValue = (text: string) => text.replace(/[\r\n]+/g, " ");

/**
 * Without SMTP_URL letters are kept as files that a person can open: `.data/mail/*.eml`. Their lines stay whole, so that
 * the link can be copied out of them; a mail library would fold it.
 */
async function keepLocally(id: string, letter: Letter): Promise<void> {
  const head = [
    `From: ${headerValue(env().MAIL_FROM)}`,
    `To: ${headerValue(letter.recipient)}`,
    `Subject: ${headerValue(letter.subject)}`,
    `Date: ${new Date().toUTCString().replace("GMT", "+0000")}`,
    "MIME-Version: 1.0",
    "Content-Type: text/plain; charset=utf-8",
    "Content-Transfer-Encoding: 8bit",
  ];
  const folder = path.resolve(env().DATA_DIRECTORY, "mail");
  await mkdir(folder, { recursive: true, mode: 0o700 });
  const stamp = new Date().toISOString().replace(/[:.]/g, "-");
  const file = path.join(folder, `${stamp}-${id}.eml`);
  await writeFile(`${file}.new`, `${head.join("\n")}\n\n${letter.body}\n`, { mode: 0o600 });
  await rename(`${file}.new`, file);
}

async function sendBySmtp(url: string, letter: Letter): Promise<void> {
  const transport = createTransport({
    url,
    connectionTimeout: TIME_OUT_MS,
    greetingTimeout: TIME_OUT_MS,
    socketTimeout: TIME_OUT_MS,
  });
  try {
    await transport.sendMail({
      from: env().MAIL_FROM,
      to: letter.recipient,
      subject: letter.subject,
      text: letter.body,
      html: letterHtml(letter.body),
      // Nothing that an address could smuggle in is read from disk or fetched.
      disableFileAccess: true,
      disableUrlAccess: true,
    });
  } finally {
    transport.close();
  }
}

/** Hands one letter over: to the mail server of SMTP_URL, else to the local fake. */
export async function deliver(id: string, letter: Letter): Promise<void> {
  const { SMTP_URL } = env();
  await (SMTP_URL ? sendBySmtp(SMTP_URL, letter) : keepLocally(id, letter));
}
