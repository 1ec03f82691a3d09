import { describe, expect, it } from "vitest";
import type { z } from "zod";
import { siftRequestSchema } from "../recipe/recipe.ts";
import { faultsOf } from "./fault-words.ts";
import {
  answersRequestSchema,
  decisionRequestSchema,
  ensembleListQuerySchema,
  populationsQuerySchema,
  rereadRequestSchema,
  siftQuerySchema,
  uploadFieldsSchema,
} from "./schemas.ts";

function told(schema: z.ZodType, data: unknown): string[] {
  const parsed = schema.safeParse(data, { reportInput: true });
  if (parsed.success) return [];
  return faultsOf(parsed.error).map(({ field, message }) => `${field ?? "-"}: ${message}`);
}

describe("what a request lacks is said in plain words, with what would be right", () => {
  it.each([
    [
      populationsQuerySchema,
      { weights: "x" },
      'weights: Expected "auto", "copies" or "degeneracy"; found "x".',
    ],
    [
      populationsQuerySchema,
      { temperature: "warm" },
      'temperature: A temperature is a number of K above zero and up to 100,000, such as 298.15. Found "warm".',
    ],
    [
      populationsQuerySchema,
      { temperature: "0" },
      'temperature: A temperature is a number of K above zero and up to 100,000, such as 298.15. Found "0".',
    ],
    [
      siftQuerySchema,
      { wait: "long" },
      'wait: Give the seconds to wait as a number, such as 30. Found "long".',
    ],
    [ensembleListQuerySchema, { page: "0" }, 'page: Pages are counted from 1. Found "0".'],
    [siftRequestSchema, {}, "level: It is missing. Name a level by its id or its name."],
    [siftRequestSchema, { level: 3 }, "level: Expected a text; found 3. Name a level by its id or its name."],
    [
      siftRequestSchema,
      { level: "A", window: "3" },
      'window: Expected a number; found "3". An energy window is a number of kcal/mol from 0, or null for none.',
    ],
    [
      siftRequestSchema,
      { level: "A", rmsdTolerance: -1 },
      "rmsdTolerance: Expected a number from 0; found -1. An RMSD tolerance is a number of Å from 0 to 100.",
    ],
    [
      siftRequestSchema,
      { level: "A", energyTolerance: Number.POSITIVE_INFINITY },
      "energyTolerance: Expected a number; found a number out of range. An energy tolerance is a number of kcal/mol from 0, or null for none.",
    ],
    [
      siftRequestSchema,
      { level: "A", atoms: "some" },
      'atoms: Expected "heavy", "heavy+polarH" or "all"; found "some".',
    ],
    [siftRequestSchema, { level: "A", symmetry: "yes" }, 'symmetry: Expected true or false; found "yes".'],
    [siftRequestSchema, null, "-: Expected an object with named fields; found null."],
    [siftRequestSchema, { level: "A", teamId: "x" }, 'teamId: There is no field "teamId".'],
    [
      answersRequestSchema,
      { answers: [{ id: "level" }] },
      "answers.0.option: It is missing. It is the id of one of the question's options; for a level, its name.",
    ],
    [
      answersRequestSchema,
      { answers: [] },
      'answers: Expected at least 1 of them. Send {"answers": [{"id": "energy-unit", "option": "kcal/mol"}]}.',
    ],
    [decisionRequestSchema, { reason: " " }, "reason: It is empty. Give the reason in up to 500 characters."],
    [
      uploadFieldsSchema,
      { energyUnit: "furlong" },
      'energyUnit: Expected "hartree", "kcal/mol", "kJ/mol" or "eV"; found "furlong".',
    ],
    [
      uploadFieldsSchema,
      { energyFrom: "E" },
      'energyFrom: Write key:NAME, field:NAME, number:N or none. Found "E".',
    ],
    [uploadFieldsSchema, { name: "n".repeat(201) }, "name: Expected at most 200 characters; found 201."],
    [
      rereadRequestSchema,
      { energyTemperature: true },
      "energyTemperature: Expected a number or a text; found true. A temperature is a number of K above zero and up to 100,000, such as 298.15.",
    ],
  ] as const)("%# %j", (schema, data, words) => {
    expect(told(schema, data)).toEqual([words]);
  });

  it("never in the validator's own", () => {
    const junk: unknown[] = [null, 3, "x", true, [], {}, { a: 1 }, -1, 1e9, Number.NaN, "\u202e<b>"];
    const schemas = [
      populationsQuerySchema,
      siftQuerySchema,
      ensembleListQuerySchema,
      siftRequestSchema,
      answersRequestSchema,
      decisionRequestSchema,
      uploadFieldsSchema,
      rereadRequestSchema,
    ];
    for (const schema of schemas) {
      for (const key of Object.keys(schema.shape)) {
        for (const value of junk) {
          for (const line of told(schema, { [key]: value })) {
            expect(line).not.toMatch(/invalid|undefined|NaN|option:.*\||received|zod|regex|pattern|\u202e/i);
          }
        }
      }
    }
  });
});

it("a wait is held to a minute, a window may be 0", () => {
  expect(siftQuerySchema.parse({ wait: "600" })).toEqual({ wait: 60 });
  expect(siftQuerySchema.parse({ wait: "0" })).toEqual({ wait: 0 });
  expect(siftQuerySchema.parse({ wait: "" })).toEqual({});
  expect(siftRequestSchema.parse({ level: "A", window: 0 }).window).toBe(0);
});
