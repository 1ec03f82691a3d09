import { describe, expect, it } from "vitest";
import { factsLine, figureJson, titleLines, withFacts } from "./export-figure";

describe("titleLines", () => {
  it("breaks a title between words and loses none of them", () => {
    const title = "How the count hangs on the tolerance";
    expect(titleLines(title, 20)).toEqual(["How the count hangs", "on the tolerance"]);
    expect(titleLines(title, 200)).toEqual([title]);
    expect(titleLines(title, 1).join(" ")).toBe(title);
    expect(titleLines("  ", 20)).toEqual([]);
  });
});

describe("what the numbers of a figure belong to", () => {
  const facts = [
    { name: "temperature", unit: "K", value: 298.15 },
    { name: "level", value: "MMFF94" },
    { name: "standard deviation about the zero", unit: "kcal/mol", value: 0.5278635 },
  ];

  it("stands under the title, in every row of the CSV and beside the rows of the JSON", () => {
    expect(factsLine(facts).replaceAll("\u00a0", " ")).toBe(
      "temperature 298.15 K; level MMFF94; standard deviation about the zero 0.53 kcal/mol",
    );
    expect(withFacts(["p"], [[0.25], [null]], facts.slice(0, 2))).toEqual({
      head: ["p", "temperature [K]", "level"],
      rows: [
        [0.25, 298.15, "MMFF94"],
        [null, 298.15, "MMFF94"],
      ],
    });
    const data = { columns: [{ name: "population", unit: "%" }], rows: [[25]] };
    expect(JSON.parse(figureJson("Ladder", data, { facts, note: "Band: one." }))).toEqual({
      title: "Ladder",
      context: {
        "temperature [K]": 298.15,
        level: "MMFF94",
        "standard deviation about the zero [kcal/mol]": 0.5278635,
      },
      note: "Band: one.",
      rows: [{ "population [%]": 25 }],
    });
  });
});
