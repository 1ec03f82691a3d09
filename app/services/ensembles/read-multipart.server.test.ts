import { describe, expect, it } from "vitest";
import { openForm } from "./read-multipart.server.ts";

/** The name under which a file arrives that was sent with this one. */
async function nameOf(sent: string): Promise<string> {
  const head = `content-disposition: form-data; name="file"; filename="${sent}"`;
  const body = new Blob([`--b\r\n${head}\r\n\r\nx\r\n--b--\r\n`]).stream();
  for await (const part of openForm({ body, contentType: "multipart/form-data; boundary=b" }).parts()) {
    if (part.kind !== "file") continue;
    part.data.resume();
    return part.filename;
  }
  throw new Error("no file came");
}

describe("the name of a file in a form", () => {
  // HTML standard, multipart/form-data encoding algorithm: these three are written out, and nothing else.
  it.each([
    ["q%22uo%22te.xyz", 'q"uo"te.xyz'],
    ["two%0D%0Alines.xyz", "two\r\nlines.xyz"],
    ["50%25 %2e%2e%2F%41%0a.xyz", "50%25 %2e%2e%2F%41%0a.xyz"],
    ["größe, 1;2.xyz", "größe, 1;2.xyz"],
  ])("is the one it has: %s", async (sent, name) => expect(await nameOf(sent)).toBe(name));

  it("is cut to what stands behind the folders, of either kind", async () => {
    expect(await nameOf("a/b.xyz")).toBe("b.xyz");
    expect(await nameOf("C:\\runs\\b.xyz")).toBe("b.xyz");
  });
});
