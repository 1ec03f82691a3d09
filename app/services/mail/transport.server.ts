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

function parts(letter: Letter) {
  return {
    from: env().MAIL_FROM,
    to: letter.recipient,
    subject: letter.subject,
    text: letter.body,
    html: letterHtml(letter.body),
    // Nothing that an address could smuggle in is read from disk or fetched.
    disableFileAccess: true,
    disableUrlAccess: true,
  };
}

/** Without SMTP_URL letters are kept as files that a person can open: `.data/mail/*.eml`. */
async function keepLocally(id: string, letter: Letter): Promise<void> {
  const made = await createTransport({ streamTransport: true, buffer: true, newline: "unix" }).sendMail(
    parts(letter),
  );
  const folder = path.resolve(env().DATA_DIRECTORY, "mail");
  await mkdir(folder, { recursive: true, mode: 0o700 });
  const stamp = new Date().toISOString().replace(/[:.]/g, "-");
  const file = path.join(folder, `${stamp}-${id}.eml`);
  await writeFile(`${file}.new`, made.message as Buffer, { mode: 0o600 });
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
    await transport.sendMail(parts(letter));
  } finally {
    transport.close();
  }
}

/** Hands one letter over: to the mail server of SMTP_URL, else to the local fake. */
export async function deliver(id: string, letter: Letter): Promise<void> {
  const { SMTP_URL } = env();
  await (SMTP_URL ? sendBySmtp(SMTP_URL, letter) : keepLocally(id, letter));
}
