import { describe, expect, test } from "vitest";
import { decodeText, Utf8Stream } from "./decode.ts";
import { escapeControls, hasSteeringCharacters, quoteFound } from "./escape.ts";
import { sniff } from "./sniff.ts";

const bytes = (text: string) => new TextEncoder().encode(text);

describe("what a message quotes", () => {
  test("is escaped where it would steer the screen", () => {
    expect(escapeControls("a\tb\u0007\u202ec\u0000")).toBe("a\\tb\\u0007\\u202ec\\u0000");
    expect(escapeControls("\ud800x")).toBe("\\ud800x");
    expect(hasSteeringCharacters("Küvette 1 \u{1d6c2}")).toBe(false);
    expect(hasSteeringCharacters("a\u200fb")).toBe(true);
  });

  test("is cut at 80 characters", () => {
    expect(quoteFound("x".repeat(80))).toBe("x".repeat(80));
    expect(quoteFound("x".repeat(81))).toBe(`${"x".repeat(79)}…`);
    expect([...quoteFound("\u0007".repeat(2_000_000))]).toHaveLength(80);
  });
});

describe("encodings", () => {
  test("UTF-16 with mark and a mark split over chunks", () => {
    const text = "3\nÜ \u{1d6c2}\n";
    const units = Uint8Array.from([
      0xff,
      0xfe,
      ...new Uint8Array(
        Uint16Array.from([...text].flatMap((c) => c.split("").map((u) => u.charCodeAt(0)))).buffer,
      ),
    ]);
    const stream = new Utf8Stream();
    const out: number[] = [];
    for (const byte of units) out.push(...stream.push(Uint8Array.of(byte)));
    out.push(...stream.end());
    expect(new TextDecoder().decode(Uint8Array.from(out))).toBe(text);
  });

  test("the mark of UTF-8 goes, shorter files stay", () => {
    const stream = new Utf8Stream();
    const first = stream.push(Uint8Array.of(0xef));
    const second = stream.push(Uint8Array.of(0xbb, 0xbf, 0x31));
    expect([...first, ...second, ...stream.end()]).toEqual([0x31]);
    const short = new Utf8Stream();
    expect([...short.push(Uint8Array.of(0x31)), ...short.end()]).toEqual([0x31]);
  });

  test("bytes that are no UTF-8 are Windows-1252", () => {
    const line = Uint8Array.of(0x80, 0x20, 0xfc);
    expect(decodeText(line, 0, 3)).toEqual({ text: "€ ü", legacy: true });
    expect(decodeText(bytes("ü"), 0, 2)).toEqual({ text: "ü", legacy: false });
  });
});

describe("sniffing", () => {
  test("leaves reactions and other files of the family of MOL to their reader, which says what they are (S24)", () => {
    expect(sniff(bytes("$RXN\n\n\n\n  1  1\n$MOL\n"), "step.rxn").format).toBe("sdf");
  });

  test("tells the three formats apart by content", () => {
    const said = (text: string) => sniff(bytes(text), "run.out").refusal?.message;
    const rule = "-".repeat(60);
    expect(said(`\n    Psi4: An Open-Source Quantum Chemistry Package\n`)).toContain("the output of Psi4");
    expect(said(`\n ${rule}\n   a banner\n ${rule}\n`)).toContain("the output of a program");
    expect(said("Some package, version 3.2\nhost: a\n")).toContain("the output of a program");
    expect(said("run on a node\n  wall time used: 3 s\n")).toContain("the output of a calculation");
    expect(said("C 0.1 0.2 0.3\nH 0.1 0.2 1.3\n")).toBeUndefined();
    expect(sniff(bytes("3\nwater\nO 0 0 0\n"), "a.txt").format).toBe("xyz");
    expect(sniff(bytes("name;E\na;1\nb;2\n"), "a.txt").format).toBe("csv");
    const mol =
      "title\n  prog\n\n  3  2  0  0  0  0  0  0  0  0999 V2000\n    0.0000    0.0000    0.1173 O   0  0\n";
    expect(sniff(bytes(mol), "a.txt").format).toBe("sdf");
    // A blank title is legal: the counts line alone says it (row S03).
    expect(sniff(bytes(mol.replace("title", "")), "a.txt").format).toBe("sdf");
    expect(sniff(bytes("some words\nand more\n"), "a.xyz").format).toBe("unknown");
  });

  test("a title or comment of digits does not hide the format", () => {
    expect(sniff(bytes("12\nV3000 is only a comment\nC 0 0 0\n"), "a.xyz").format).toBe("xyz");
  });

  test("a name that ends in .gz is compared without it", () => {
    expect(sniff(bytes("3\nwater\nO 0 0 0\n"), "a.xyz.gz").remark).toBeNull();
    expect(sniff(bytes("3\nwater\nO 0 0 0\n"), "a.sdf.gz").remark?.code).toBe("G01");
  });

  test("zip is named as a container, an office file as what it is", () => {
    expect(sniff(Uint8Array.of(0x50, 0x4b, 3, 4, 20, 0), "a.zip").container).toBe("zip");
    const odt = bytes("PK\u0003\u0004............mimetypeapplication/vnd.oasis.opendocument.text");
    expect(sniff(odt, "a.odt").refusal?.message).toContain("office document");
  });
});
