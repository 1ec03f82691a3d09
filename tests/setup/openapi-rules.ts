import { z } from "zod";

/**
 * The structural rules of OpenAPI 3.1.0 (spec.openapis.org/oas/v3.1.0, sections 4.8.1 to 4.8.30) and of JSON Schema
 * 2020-12 (json-schema.org/draft/2020-12, core and validation) as far as the description of the API makes use of them:
 * every object is closed, so that a word of another version of either, or a misspelt one, is found.
 */

const words = z.string().min(1);
const uri = z.string().regex(/^(https?:\/\/|\/|#)/);
const extensible = <T extends z.ZodRawShape>(shape: T) => z.strictObject(shape);
const record = <T extends z.ZodType>(value: T) => z.record(z.string(), value);
const count = z.number().int().min(0);

const TYPES = ["null", "boolean", "object", "array", "number", "string", "integer"] as const;
const pattern = z.string().refine((text) => {
  try {
    return Boolean(new RegExp(text, "u"));
  } catch {
    return false;
  }
}, "is a regular expression of ECMA-262");

export const REFERENCE = /^#\/components\/(schemas|responses|parameters|headers)\/[A-Za-z0-9._-]+$/;
const reference = z.string().regex(REFERENCE);

/** A schema object: JSON Schema 2020-12 with the words that OpenAPI adds. */
export const schemaObject: z.ZodType = z.lazy(() =>
  z.union([
    z.boolean(),
    extensible({
      $ref: reference.optional(),
      type: z
        .union([z.enum(TYPES), z.array(z.enum(TYPES)).min(1).refine(distinct, "names each type once")])
        .optional(),
      enum: z.array(z.unknown()).min(1).refine(distinct, "names each value once").optional(),
      const: z.unknown().optional(),
      multipleOf: z.number().positive().optional(),
      minimum: z.number().optional(),
      maximum: z.number().optional(),
      exclusiveMinimum: z.number().optional(),
      exclusiveMaximum: z.number().optional(),
      minLength: count.optional(),
      maxLength: count.optional(),
      pattern: pattern.optional(),
      items: schemaObject.optional(),
      prefixItems: z.array(schemaObject).min(1).optional(),
      contains: schemaObject.optional(),
      minItems: count.optional(),
      maxItems: count.optional(),
      uniqueItems: z.boolean().optional(),
      properties: record(schemaObject).optional(),
      patternProperties: record(schemaObject).optional(),
      additionalProperties: schemaObject.optional(),
      propertyNames: schemaObject.optional(),
      required: z.array(z.string()).refine(distinct, "names each member once").optional(),
      minProperties: count.optional(),
      maxProperties: count.optional(),
      allOf: z.array(schemaObject).min(1).optional(),
      anyOf: z.array(schemaObject).min(1).optional(),
      oneOf: z.array(schemaObject).min(1).optional(),
      not: schemaObject.optional(),
      title: words.optional(),
      description: words.optional(),
      default: z.unknown().optional(),
      examples: z.array(z.unknown()).optional(),
      example: z.unknown().optional(),
      deprecated: z.boolean().optional(),
      readOnly: z.boolean().optional(),
      writeOnly: z.boolean().optional(),
      format: words.optional(),
      contentEncoding: words.optional(),
      contentMediaType: words.optional(),
    }),
  ]),
);

function distinct(values: readonly unknown[]): boolean {
  return new Set(values.map((value) => JSON.stringify(value))).size === values.length;
}

const orReference = <T extends z.ZodType>(object: T) =>
  z.union([
    z.strictObject({ $ref: reference, summary: words.optional(), description: words.optional() }),
    object,
  ]);

const mediaType = extensible({ schema: schemaObject.optional(), example: z.unknown().optional() });
const content = z.record(z.string().regex(/^[a-z]+\/[a-z0-9.+-]+$/), mediaType);
const header = extensible({
  description: words.optional(),
  required: z.boolean().optional(),
  schema: schemaObject,
});

const parameter = extensible({
  name: words,
  in: z.enum(["query", "header", "path", "cookie"]),
  description: words.optional(),
  required: z.boolean().optional(),
  deprecated: z.boolean().optional(),
  style: words.optional(),
  explode: z.boolean().optional(),
  schema: schemaObject,
}).refine(
  ({ in: place, required }) => place !== "path" || required === true,
  "a parameter of the path is required",
);

const response = extensible({
  description: words,
  headers: record(orReference(header)).optional(),
  content: content.optional(),
});

const requirement = record(z.array(z.string()));

const operation = extensible({
  operationId: words,
  summary: words,
  description: words.optional(),
  tags: z.array(words).optional(),
  parameters: z.array(orReference(parameter)).optional(),
  requestBody: extensible({
    description: words.optional(),
    required: z.boolean().optional(),
    content,
  }).optional(),
  responses: z
    .record(z.string().regex(/^([1-5]\d\d|[1-5]XX|default)$/), orReference(response))
    .refine(
      (all) => Object.keys(all).some((status) => status.startsWith("2")),
      "one answer says that it worked",
    ),
  deprecated: z.boolean().optional(),
  security: z.array(requirement).optional(),
});

const pathItem = extensible({
  summary: words.optional(),
  description: words.optional(),
  parameters: z.array(orReference(parameter)).optional(),
  get: operation.optional(),
  put: operation.optional(),
  post: operation.optional(),
  delete: operation.optional(),
  patch: operation.optional(),
});

const securityScheme = z.discriminatedUnion("type", [
  extensible({
    type: z.literal("http"),
    scheme: words,
    bearerFormat: words.optional(),
    description: words.optional(),
  }),
  extensible({
    type: z.literal("apiKey"),
    name: words,
    in: z.enum(["query", "header", "cookie"]),
    description: words.optional(),
  }),
]);

const componentName = z.string().regex(/^[A-Za-z0-9._-]+$/);

/** The OpenAPI object. */
export const openApiObject = extensible({
  openapi: z.string().regex(/^3\.1\.\d+$/),
  info: extensible({
    title: words,
    version: words,
    summary: words.optional(),
    description: words.optional(),
    license: extensible({ name: words, identifier: words.optional(), url: uri.optional() }).optional(),
  }),
  servers: z.array(extensible({ url: uri, description: words.optional() })).min(1),
  paths: z.record(z.string().regex(/^\//), pathItem),
  components: extensible({
    schemas: z.record(componentName, schemaObject).optional(),
    responses: z.record(componentName, response).optional(),
    parameters: z.record(componentName, parameter).optional(),
    headers: z.record(componentName, header).optional(),
    securitySchemes: z.record(componentName, securityScheme).optional(),
  }),
  security: z.array(requirement).optional(),
});

export type OpenApi = z.infer<typeof openApiObject>;
export type Operation = z.infer<typeof operation>;

/** Every operation with its method and the path as it is written in the document. */
export function operationsOf(document: OpenApi): { method: string; path: string; operation: Operation }[] {
  return Object.entries(document.paths).flatMap(([path, item]) =>
    (["get", "put", "post", "delete", "patch"] as const).flatMap((method) => {
      const operation = item[method];
      return operation ? [{ method: method.toUpperCase(), path, operation }] : [];
    }),
  );
}

/** A schema of the document as a reader of values, its references resolved within the document. */
export function readerOf(document: OpenApi, schema: unknown): z.ZodType {
  const asDefs = (value: unknown): unknown =>
    JSON.parse(JSON.stringify(value).replaceAll('"#/components/schemas/', '"#/$defs/'));
  const root = asDefs(schema);
  if (typeof root !== "object" || root === null) throw new TypeError("A schema is an object here.");
  return z.fromJSONSchema({ ...root, $defs: asDefs(document.components.schemas ?? {}) } as Parameters<
    typeof z.fromJSONSchema
  >[0]);
}

/** Every schema object below a value, with where it stands. */
export function schemasBelow(value: unknown, at = "#"): { at: string; schema: Record<string, unknown> }[] {
  if (typeof value !== "object" || value === null) return [];
  if (Array.isArray(value)) return value.flatMap((one, k) => schemasBelow(one, `${at}/${k}`));
  const own = value as Record<string, unknown>;
  const looksLike = ["type", "$ref", "anyOf", "oneOf", "allOf", "enum"].some((key) => key in own);
  return [
    ...(looksLike ? [{ at, schema: own }] : []),
    ...Object.entries(own).flatMap(([key, below]) => schemasBelow(below, `${at}/${key}`)),
  ];
}
