import { describe, expect, it } from "vitest";
import { readAnswer } from "./send-upload.ts";

const ensemble = {
  id: "abcdefghijklmnop",
  name: "Alanine",
  intake: {
    frames: 400,
    accepted: 397,
    remarked: 5,
    held: 3,
    messages: [],
    questions: [{ id: "energy-unit" }],
  },
};

describe("readAnswer", () => {
  it("takes a made ensemble and one that was here already", () => {
    const made = readAnswer(201, JSON.stringify(ensemble));
    expect(made).toMatchObject({ kind: "taken", taken: { frames: 400, questions: 1, already: false } });
    const again = readAnswer(200, JSON.stringify(ensemble));
    expect(again).toMatchObject({ kind: "taken", taken: { id: ensemble.id, already: true } });
  });

  it("passes on why a file was refused, with the places at fault and the ensemble that is there", () => {
    const problem = {
      title: "Other answers",
      detail: "These bytes are here with another unit.",
      errors: [{ file: "a.xyz", line: 2, message: "Found eV." }],
      existing: ensemble.id,
    };
    expect(readAnswer(409, JSON.stringify(problem))).toEqual({
      kind: "refused",
      refusal: {
        title: problem.title,
        detail: problem.detail,
        faults: problem.errors,
        existing: ensemble.id,
      },
    });
  });

  it("counts what is no answer of ours as a lost connection", () => {
    for (const [status, text] of [
      [502, "<html>Bad gateway</html>"],
      [0, ""],
      [200, "null"],
      [302, "{}"],
    ] as const) {
      expect(readAnswer(status, text)).toEqual({ kind: "failed" });
    }
  });
});
