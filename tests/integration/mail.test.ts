import { mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import type { AddressInfo } from "node:net";
import os from "node:os";
import path from "node:path";
import { eq } from "drizzle-orm";
import { SMTPServer } from "smtp-server";
import { afterEach, beforeEach, describe, expect, it, vi } from "vitest";
import { db } from "~/db/client.server";
import { mailQueue } from "~/db/schema.server";
import * as environment from "~/env.server";
import { queueMail } from "~/services/mail/queue-mail.server";
import { sendDueMail } from "~/services/mail/send-mail.server";
import { letterHtml } from "~/services/mail/transport.server";

const LETTER = {
  recipient: "ada@lab.example",
  subject: "A subject",
  body: "First paragraph & more.\n\nhttp://127.0.0.1:3000/reset-password/SECRET-of-43-characters-as-they-are-made-here\n\nThe end. ä",
};

let folder = "";

function withEnv(change: Partial<environment.Env>): void {
  const real = environment.env();
  // why: settings are read once a process.
  vi.spyOn(environment, "env").mockReturnValue({ ...real, DATA_DIRECTORY: folder, ...change });
}

beforeEach(async () => {
  folder = mkdtempSync(path.join(os.tmpdir(), "lowlying-mail-"));
  await db.delete(mailQueue);
});
afterEach(() => rmSync(folder, { recursive: true, force: true }));

const kept = () => readdirSync(path.join(folder, "mail"));

describe("the mail queue", () => {
  it("keeps letters as files that a person can open, where no mail server is named", async () => {
    withEnv({});
    await queueMail(LETTER);
    expect(await sendDueMail()).toBe(1);
    const [file = ""] = kept();
    expect(file).toMatch(/\.eml$/);
    const text = readFileSync(path.join(folder, "mail", file), "utf8");
    expect(text).toContain("To: ada@lab.example");
    expect(text).toContain("Subject: A subject");
    // Whole, in a line of its own: it is there to be copied.
    expect(text).toMatch(
      /^http:\/\/127\.0\.0\.1:3000\/reset-password\/SECRET-of-43-characters-as-they-are-made-here$/m,
    );
    expect(text).toContain("The end. ä");
    expect(await sendDueMail()).toBe(0);
  });

  it("sends through the server of SMTP_URL", async () => {
    const received: string[] = [];
    const server = new SMTPServer({
      authOptional: true,
      disabledCommands: ["STARTTLS", "AUTH"],
      onData(stream, _session, done) {
        let text = "";
        stream.on("data", (chunk: Buffer) => {
          text += chunk.toString();
        });
        stream.on("end", () => {
          received.push(text);
          done();
        });
      },
    });
    await new Promise<void>((resolve) => server.listen(0, "127.0.0.1", resolve));
    const { port } = server.server.address() as AddressInfo;
    withEnv({ SMTP_URL: `smtp://127.0.0.1:${port}` });
    await queueMail(LETTER);
    await sendDueMail();
    await new Promise<void>((resolve) => server.close(resolve));
    expect(received).toHaveLength(1);
    expect(received[0]).toContain("Subject: A subject");
    const [row] = await db.select().from(mailQueue);
    expect(row?.sentAt).toBeInstanceOf(Date);
  });

  it("forgets the text once it is sent, since secrets stand in it", async () => {
    withEnv({});
    await queueMail(LETTER);
    await sendDueMail();
    const [row] = await db.select().from(mailQueue);
    expect(row).toMatchObject({ body: "", recipient: LETTER.recipient, failedAt: null });
  });

  it("tries again later when the server does not take it, and gives up in the end", async () => {
    // Nothing listens on port 1.
    withEnv({ SMTP_URL: "smtp://127.0.0.1:1" });
    await queueMail(LETTER);
    let now = new Date();
    expect(await sendDueMail(now)).toBe(1);
    expect(await sendDueMail(now)).toBe(0);
    const waits: number[] = [];
    for (let tries = 0; tries < 10; tries++) {
      const [row] = await db.select().from(mailQueue);
      if (row === undefined || row.failedAt !== null) break;
      expect(row.sentAt).toBeNull();
      waits.push(Math.round((row.nextTryAt.getTime() - now.getTime()) / 60_000));
      now = new Date(row.nextTryAt.getTime() + 1);
      await sendDueMail(now);
    }
    expect(waits).toEqual([1, 5, 15, 60, 180]);
    const [row] = await db.select().from(mailQueue);
    expect(row).toMatchObject({ body: "", sentAt: null, attempts: 6 });
    expect(row?.failedAt).toBeInstanceOf(Date);
  });

  it("goes out once when two senders look at the same moment", async () => {
    withEnv({});
    for (let n = 0; n < 5; n++) await queueMail({ ...LETTER, subject: `Letter ${n}` });
    const tried = await Promise.all([sendDueMail(), sendDueMail(), sendDueMail()]);
    expect(tried.reduce((sum, n) => sum + n, 0)).toBe(5);
    expect(kept()).toHaveLength(5);
    expect(await db.$count(mailQueue, eq(mailQueue.attempts, 1))).toBe(5);
  });
});

describe("the HTML part", () => {
  it("shows text as text and links addresses of a line of their own only (B05)", () => {
    const html = letterHtml('<script>alert("x")</script> & \'y\'\n\nhttps://a.example/b?c=1&d="e"');
    expect(html).not.toContain("<script>");
    expect(html).toContain("&#60;script&#62;");
    expect(html).toContain('<a href="https://a.example/b?c=1&#38;d=&#34;e&#34;">');
    expect(letterHtml("javascript:alert(1)")).not.toContain("<a ");
  });
});
