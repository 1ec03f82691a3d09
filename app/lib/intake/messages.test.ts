import { describe, expect, test } from "vitest";
import { formatMessage } from "./format-message.ts";
import { MessageList } from "./message-list.ts";
import { IntakeRejection } from "./reject.ts";
import type { IntakeMessage } from "./report.ts";

const message = (
  code: string,
  frame: number,
  severity: IntakeMessage["severity"] = "hold",
): IntakeMessage => ({
  code,
  severity,
  file: "run3.xyz",
  frame,
  message: "The frame has no atoms.",
});

describe("a message as text", () => {
  test("names file, line, frame and atom, quotes what was found, ends with the way out", () => {
    expect(
      formatMessage({
        code: "X22",
        severity: "hold",
        file: "run3.xyz",
        line: 1043,
        frame: 17,
        atom: 12,
        found: "1,234",
        message: "The y coordinate is not a number.",
        hint: 'Decimal comma? Choose "decimal comma" and read again.',
      }),
    ).toBe(
      'run3.xyz, line 1043, frame 17, atom 12: the y coordinate is not a number ("1,234"). Decimal comma? Choose "decimal comma" and read again.',
    );
  });

  test("leaves names and symbols as they are written", () => {
    const text = (said: string) => formatMessage({ code: "", severity: "remark", file: "a", message: said });
    expect(text("XYZ has no units.")).toBe("a: XYZ has no units.");
    expect(text("C4 is bonded to O9.")).toBe("a: C4 is bonded to O9.");
    expect(text("A line is too long.")).toBe("a: a line is too long.");
  });
});

describe("the first 100 of a code are listed, the rest counted", () => {
  test("for each code and severity, in the order they came", () => {
    const list = new MessageList();
    for (let k = 1; k <= 1234; k++) list.add(message("X23", k));
    list.addAll([message("X23", 7, "remark"), message("X04", 8)]);
    const listed = list.messages();
    expect(listed).toHaveLength(103);
    expect(listed.slice(99, 103).map((one) => [one.code, one.severity, one.frame])).toEqual([
      ["X23", "hold", 100],
      ["X23", "remark", 7],
      ["X04", "hold", 8],
      ["X23", "hold", undefined],
    ]);
    expect(listed.at(-1)?.message).toBe("1,134 more of this kind, not listed.");
    expect(list.count("X23")).toBe(1235);
  });

  test("exactly 100 need no count", () => {
    const list = new MessageList();
    for (let k = 1; k <= 100; k++) list.add(message("X23", k));
    expect(list.messages()).toHaveLength(100);
  });
});

test("a refusal is a 422 with the row, the place and the way out", () => {
  const refusal = new IntakeRejection({
    code: "G06",
    file: "a.xyz",
    message: "The file has no frames.",
    hint: "Is it empty?",
  });
  expect(refusal).toMatchObject({
    code: "invalid",
    message: "a.xyz: the file has no frames. Is it empty?",
    report: { code: "G06", severity: "reject" },
    faults: [{ file: "a.xyz" }],
    extra: { code: "G06" },
  });
});
