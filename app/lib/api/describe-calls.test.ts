import { describe, expect, it } from "vitest";
import { describeCalls } from "./describe-calls.ts";

const DOCUMENT = {
  openapi: "3.1.0",
  paths: {
    "/things/{id}": {
      post: {
        operationId: "make",
        summary: "Make a thing",
        parameters: [
          { name: "id", in: "path", required: true, schema: { type: "string", description: "Its id" } },
        ],
        requestBody: { content: { "application/json": { schema: { $ref: "#/components/schemas/Thing" } } } },
        responses: { "422": { description: "Not right" }, "201": { description: "Made" } },
      },
    },
  },
  components: {
    schemas: {
      Thing: {
        type: "object",
        required: ["size"],
        properties: {
          size: { type: "number", description: "In Å" },
          kind: { enum: ["a", "b"] },
          parts: { type: "array", items: { type: "integer" } },
          sheet: { type: "string", format: "binary" },
          sheets: { type: "array", items: { type: "string", format: "binary" } },
          also: { anyOf: [{ type: "string" }, { type: "null" }] },
        },
      },
    },
  },
};

describe("the calls of a document", () => {
  it("name fields by place, type and need, and answers in order of status", () => {
    const [call] = describeCalls(DOCUMENT);
    expect(call).toMatchObject({ id: "make", method: "POST", path: "/things/{id}", summary: "Make a thing" });
    expect(call?.fields).toEqual([
      { name: "id", place: "address", type: "string", required: true, words: "Its id" },
      { name: "size", place: "JSON body", type: "number", required: true, words: "In Å" },
      { name: "kind", place: "JSON body", type: "one of a, b", required: false, words: "" },
      { name: "parts", place: "JSON body", type: "list of integer", required: false, words: "" },
      { name: "sheet", place: "JSON body", type: "file", required: false, words: "" },
      { name: "sheets", place: "JSON body", type: "one or more files", required: false, words: "" },
      { name: "also", place: "JSON body", type: "string or null", required: false, words: "" },
    ]);
    expect(call?.answers).toEqual([
      { status: "201", words: "Made" },
      { status: "422", words: "Not right" },
    ]);
  });

  it("of nothing are none", () => {
    expect(describeCalls({})).toEqual([]);
  });
});
