import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { METHANE, NO_ANSWERS, tableReport } from "../../tests/factories/table-report.ts";
import { readAtom } from "./csv/header.ts";
import { planTable } from "./csv/plan-table.ts";
import { type TableOptions, TableReader } from "./csv.server.ts";
import { DomainError } from "./errors.ts";
import { textCell } from "./export/csv.ts";

const bytesOf = (text: string) => new TextEncoder().encode(text);

function read(text: string, options: Partial<TableOptions> = {}, chunk = 7) {
  const reader = new TableReader({ file: "t.csv", ...options });
  const bytes = bytesOf(text);
  for (let at = 0; at < bytes.length; at += chunk) reader.push(bytes.subarray(at, at + chunk));
  return reader.end();
}

describe("a table", () => {
  it("says the same in any pieces and with any ends of lines", () => {
    const text = 'frame;"a;b";c [Å]\n1;0.5;"x\ny"\n2;;7\n\n;;\n3;1e-3;8';
    const whole = JSON.stringify(tableReport("t.csv", bytesOf(text)));
    for (const chunk of [1, 2, 3, 5, 64]) {
      for (const end of ["\n", "\r\n", "\r"]) {
        expect(JSON.stringify(tableReport("t.csv", bytesOf(text.replaceAll("\n", end)), chunk))).toBe(whole);
      }
    }
  });

  it("reads cells that a ' keeps from being run (row C13)", () => {
    const table = read("frame,a [Å]\n1,'-1\n2,'+2.5\n3,'x\n");
    expect([...(table.columns[0]?.values ?? [])]).toEqual([-1, 2.5, 0]);
    expect(table.columns[0]?.textCount).toBe(1);
  });

  it("takes names for atoms only as C1, H12 or shift_7 (row C15)", () => {
    expect(readAtom("q16")).toBeNull();
    expect(readAtom("charge7")).toBeNull();
    expect(readAtom("q_16")).toMatchObject({ atom: 16 });
    expect(readAtom("shift_7")).toMatchObject({ atom: 7, quantity: "shift" });
    expect(readAtom("H12")).toMatchObject({ atom: 12, element: 1 });
  });

  it("proposes hartree for energies that come close to the isolated atoms, as intake does (row E07)", () => {
    const answers = { ...NO_ANSWERS, kind: "energy" as const, level: "HF" };
    const optionsOf = (text: string) =>
      planTable(read(text), METHANE, answers)
        .questions.find(({ code }) => code === "energy-unit")
        ?.options.map(({ id, proposed }) => [id, proposed === true]);
    const hartree = optionsOf("frame,total\n1,-40.1\n2,-40.09\n3,-40.08\n");
    expect(hartree?.filter(([, proposed]) => proposed)).toEqual([["hartree", true]]);
    expect(hartree).toHaveLength(4);
    const relative = optionsOf("frame,total\n1,0\n2,1.5\n3,2.5\n");
    expect(relative?.some(([, proposed]) => proposed)).toBe(false);
  });

  it("without rows is refused for that", () => {
    const table = read("frame,a [Å]\n");
    expect(() => planTable(table, METHANE, NO_ANSWERS)).toThrow(/no rows below its header/);
  });

  it("gives back every number and label that was written", () => {
    const cell = fc.double({ noNaN: true, min: -1e50, max: 1e50 });
    const label = fc.string({ minLength: 1, maxLength: 12 }).filter((text) => {
      // What a spreadsheet trims away, or takes for a missing value, is no label here.
      return text === text.trim() && !/[\0]/.test(text) && text.trim() !== "";
    });
    const rows = fc.uniqueArray(fc.tuple(label, cell, cell), {
      selector: ([name]) => name,
      minLength: 1,
      maxLength: 15,
    });
    fc.assert(
      fc.property(rows, (written) => {
        const text = ["label,a [Å],b", ...written.map(([name, a, b]) => `${textCell(name)},${a},${b}`)].join(
          "\r\n",
        );
        const table = read(text);
        expect(table.keys).toEqual(written.map(([name]) => name.replace(/\r\n?/g, "\n")));
        expect([...(table.columns[0]?.values ?? [])]).toEqual(written.map(([, a]) => a + 0));
        expect([...(table.columns[1]?.values ?? [])]).toEqual(written.map(([, , b]) => b + 0));
      }),
      { seed: 11, numRuns: 120 },
    );
  });

  it("is read or refused in words, never more, whatever the bytes", () => {
    const piece = fc.constantFrom(
      "frame",
      "label",
      ",",
      ";",
      "\t",
      "|",
      '"',
      "\n",
      "\r",
      "1",
      "0,5",
      "1.2",
      "E [kcal/mol]",
      "C1",
      "H2",
      "-",
      "é",
      "\u2212",
      " ",
      "[",
      "]",
      "(",
      "=",
      "'",
      "nan",
      "1.234,5",
    );
    const text = fc.array(piece, { maxLength: 60 }).map((pieces) => bytesOf(pieces.join("")));
    fc.assert(
      fc.property(fc.oneof(text, fc.uint8Array({ maxLength: 200 })), (bytes) => {
        const reader = new TableReader({ file: "t.csv" });
        try {
          reader.push(bytes);
          const table = reader.end();
          const plan = planTable(table, METHANE, NO_ANSWERS);
          for (const { data } of plan.columns) {
            expect(data.values.every(Number.isFinite)).toBe(true);
            expect(data.values.length).toBe(5);
          }
          expect(plan.messages.every(({ message }) => message.length > 0)).toBe(true);
        } catch (error) {
          expect(error).toBeInstanceOf(DomainError);
        }
      }),
      { seed: 12, numRuns: 500 },
    );
  });

  it("keeps to its limits", () => {
    const rows = Array.from({ length: 30 }, (_, k) => `${k + 1},1,2,3`).join("\n");
    expect(() => read(`frame,a,b,c\n${rows}`, { limits: { rows: 20 } })).toThrow("more than 20 rows");
    expect(() => read(`frame,a,b,c\n${rows}`, { limits: { cells: 60 } })).toThrow("more than 60 cells");
    expect(() => read(`frame,a,b,c\n${rows}`, { limits: { columns: 3 } })).toThrow(
      "4 columns; 3 is the limit",
    );
    expect(() => read(`frame,a\n1,"${"x".repeat(70_000)}`)).toThrow("never closed");
    expect(() => read(`frame,${"x".repeat(1_100_000)}\n1,2\n`, {}, 65_536)).toThrow("1 MiB");
    expect(() => read("frame,a\n1,\0\n")).toThrow("NUL");
  });

  it("says of a text that is a number but for its comma what it may be (row C14)", () => {
    const said = (text: string, style: TableOptions["style"] = null) =>
      planTable(read(text, { style }), METHANE, { ...NO_ANSWERS, style })
        .messages.filter(({ code }) => code === "C14")
        .map(({ line, found, hint }) => [line, found, hint?.split("?")[0]]);
    const comma = "Decimal comma or thousands";
    expect(said("frame;a;b\n1;1,25;1\n2;0.5;none yet\n", "point")).toEqual([
      [2, "1,25", comma],
      [3, "none yet", undefined],
    ]);
    expect(said("frame;d;a\n1;1,25 D;1\n2;1,5 D;2\n")).toEqual([[1, "1,25 D", comma]]);
    expect(said("frame;a;b\n1;1,2 3,4;1\n")).toEqual([[1, undefined, undefined]]);
  });

  it("reads a decimal comma and marks between thousands only as stated", () => {
    const values = (style: TableOptions["style"]) => {
      const table = read("frame;a;b\n1;1.234,5;1,234.5\n2;0,5;0.5\n", { style });
      return table.columns.map(({ values, present }) =>
        [...values].map((value, k) => (present[k] === 1 ? value : null)),
      );
    };
    expect(values("comma")).toEqual([
      [null, 0.5],
      [null, null],
    ]);
    expect(values("comma-thousands")).toEqual([
      [1234.5, 0.5],
      [null, null],
    ]);
    expect(values("point-thousands")).toEqual([
      [null, null],
      [1234.5, 0.5],
    ]);
    expect(values("point")).toEqual([
      [null, null],
      [null, 0.5],
    ]);
  });

  it("takes time and memory by its size: ten times the rows, ten times the numbers", () => {
    const table = (count: number) =>
      read(`frame,a\n${Array.from({ length: count }, (_, k) => `${k + 1},${k}.5`).join("\n")}`, {}, 65_536);
    expect(table(2_000).columns[0]?.count).toBe(2_000);
    expect(table(20_000).columns[0]?.values[19_999]).toBe(19_999.5);
  });
});
