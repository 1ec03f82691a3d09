import { describe, expect, it } from "vitest";
import { openApiDocument } from "~/services/openapi.server";
import {
  openApiObject,
  operationsOf,
  REFERENCE,
  readerOf,
  schemaObject,
  schemasBelow,
} from "./setup/openapi-rules";

// The description of the API as it is sent, against the rules of OpenAPI 3.1 and JSON Schema 2020-12: no package that
// checks them is among ours, so their structure is written out in openapi-rules.ts.

const sent: unknown = JSON.parse(JSON.stringify(openApiDocument()));
const document = openApiObject.parse(sent);
const operations = operationsOf(document);

describe("openapi.json", () => {
  it("has the structure of OpenAPI 3.1, and no word that it does not know", () => {
    expect(openApiObject.safeParse(sent).error?.issues ?? []).toEqual([]);
  });

  it("is a document that a rule would refuse when it were broken", () => {
    const broken = (
      change: (copy: { paths: Record<string, Record<string, Record<string, unknown>>> }) => void,
    ) => {
      const copy = JSON.parse(JSON.stringify(sent));
      change(copy);
      return openApiObject.safeParse(copy).success;
    };
    expect(broken(() => {})).toBe(true);
    expect(broken(({ paths }) => delete paths["/sifts/{id}"]?.get?.responses)).toBe(false);
    expect(broken(({ paths }) => Object.assign(paths["/sifts/{id}"] ?? {}, { fetch: {} }))).toBe(false);
    expect(schemaObject.safeParse({ type: "string", nullable: true }).success).toBe(false);
    expect(schemaObject.safeParse({ type: "number", minimum: 0, exclusiveMinimum: true }).success).toBe(
      false,
    );
    expect(schemaObject.safeParse({ type: "string", pattern: "(" }).success).toBe(false);
    expect(schemaObject.safeParse({ type: "array", items: [{ type: "string" }] }).success).toBe(false);
  });

  it("refers to nothing that is not there, and keeps nothing that nobody refers to", () => {
    const references = [...JSON.stringify(sent).matchAll(/"\$ref":"([^"]+)"/g)].map(([, to = ""]) => to);
    expect(references.length).toBeGreaterThan(0);
    const known = Object.keys(document.components.schemas ?? {}).map(
      (name) => `#/components/schemas/${name}`,
    );
    for (const to of references) expect(to).toMatch(REFERENCE);
    expect([...new Set(references)].sort()).toEqual(known.sort());
  });

  it("names its operations once, in a form that programs can take as a name", () => {
    const names = operations.map(({ operation }) => operation.operationId);
    expect(new Set(names).size).toBe(names.length);
    for (const name of names) expect(name).toMatch(/^[A-Za-z][A-Za-z0-9]*$/);
  });

  it("declares every word of a path and each parameter once, and has no two paths of one shape", () => {
    for (const { method, path, operation } of operations) {
      const parameters = (operation.parameters ?? []).flatMap((one) => ("name" in one ? [one] : []));
      const keys = parameters.map((one) => `${one.in} ${one.name}`);
      expect(new Set(keys).size, `${method} ${path}`).toBe(keys.length);
      const inPath = parameters.filter((one) => one.in === "path").map(({ name }) => name);
      const templated = [...path.matchAll(/\{(\w+)\}/g)].map(([, word = ""]) => word);
      expect(inPath.sort(), `${method} ${path}`).toEqual(templated.sort());
    }
    const shapes = Object.keys(document.paths).map((path) => path.replace(/\{\w+\}/g, "{}"));
    expect(new Set(shapes).size).toBe(shapes.length);
  });

  it("sends bodies with calls that may have one only, and answers refusals as problem documents", () => {
    for (const { method, path, operation } of operations) {
      if (method === "GET" || method === "DELETE")
        expect(operation.requestBody, `${method} ${path}`).toBeUndefined();
      for (const [status, answer] of Object.entries(operation.responses)) {
        if (status < "400" || !("content" in answer)) continue;
        expect(Object.keys(answer.content ?? {}), `${method} ${path} ${status}`).toEqual([
          "application/problem+json",
        ]);
      }
    }
  });

  it("asks only for ways of signing in that it describes", () => {
    const schemes = Object.keys(document.components.securitySchemes ?? {});
    const asked = [
      ...(document.security ?? []),
      ...operations.flatMap(({ operation }) => operation.security ?? []),
    ];
    expect(document.security?.length).toBe(1);
    for (const requirement of asked) {
      for (const [name, scopes] of Object.entries(requirement)) {
        expect(schemes).toContain(name);
        // Scopes belong to OAuth 2 and OpenID Connect alone.
        expect(scopes).toEqual([]);
      }
    }
  });

  it("requires members that it describes, and its defaults and examples fit their own schemas", () => {
    let held = 0;
    for (const { at, schema } of schemasBelow(sent)) {
      if (Array.isArray(schema.required) && schema.properties !== undefined) {
        expect(Object.keys(schema.properties as object), at).toEqual(expect.arrayContaining(schema.required));
      }
      for (const key of ["default", "example"] as const) {
        if (!(key in schema) || at.endsWith("/properties")) continue;
        const { [key]: value, ...rest } = schema;
        expect(
          readerOf(document, rest).safeParse(value).success,
          `${at}: ${key} ${JSON.stringify(value)}`,
        ).toBe(true);
        held += 1;
      }
    }
    expect(held).toBeGreaterThan(0);
  });

  it("can be read by a program: every schema becomes a reader that takes no other values", () => {
    for (const name of Object.keys(document.components.schemas ?? {})) {
      const reader = readerOf(document, { $ref: `#/components/schemas/${name}` });
      for (const other of [null, 3, "text", []]) expect(reader.safeParse(other).success, name).toBe(false);
    }
    const warning = readerOf(document, { $ref: "#/components/schemas/Warning" });
    expect(warning.safeParse({ code: "E12", message: "Odd." }).success).toBe(true);
    expect(warning.safeParse({ code: "E12" }).success).toBe(false);
    expect(warning.safeParse({ code: "E12", message: "Odd.", more: 1 }).success).toBe(false);
  });
});
