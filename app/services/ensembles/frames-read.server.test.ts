import { describe, expect, it } from "vitest";
import { framesRead, withFramesRead } from "./frames-read.server.ts";

const KEY = "0123456789abcdef0123456789abcdef";
const person = (userId: string) => ({ kind: "user" as const, userId, sessionId: "s" });
const upload = (key: string | null) =>
  new Request("http://127.0.0.1/files/upload", {
    method: "POST",
    headers: key === null ? {} : { "upload-key": key },
  });

describe("frames of an upload under way", () => {
  it("are told to who sends it, by its key, and to nobody else", async () => {
    const ada = person("ada");
    const done = await withFramesRead(ada, upload(KEY), async (told) => {
      expect(framesRead(ada, KEY)).toBe(0);
      told?.(4312);
      expect(framesRead(ada, KEY)).toBe(4312);
      expect(framesRead(ada, KEY.replace("0", "1"))).toBeNull();
      expect(framesRead(person("bob"), KEY)).toBeNull();
      expect(framesRead({ kind: "anonymous" }, KEY)).toBeNull();
      return "read";
    });
    expect(done).toBe("read");
    expect(framesRead(ada, KEY)).toBeNull();
  });

  it("are forgotten when the upload fails, and not counted without a key of the right form", async () => {
    const ada = person("ada");
    const fails = withFramesRead(ada, upload(KEY), () => Promise.reject(new Error("refused")));
    await expect(fails).rejects.toThrow("refused");
    expect(framesRead(ada, KEY)).toBeNull();
    for (const key of [null, "short", "x".repeat(65), "no spaces in a key"]) {
      expect(await withFramesRead(ada, upload(key), async (told) => told)).toBeUndefined();
    }
  });
});
