/** One call of the API as its reference page shows it, read out of the OpenAPI document. */
export interface CallView {
  id: string;
  method: string;
  path: string;
  summary: string;
  fields: FieldView[];
  answers: { status: string; words: string }[];
}

export interface FieldView {
  name: string;
  /** Where it stands: "address", "form" or "JSON body". */
  place: string;
  type: string;
  required: boolean;
  words: string;
}

type Json = Record<string, unknown>;

const isObject = (value: unknown): value is Json =>
  typeof value === "object" && value !== null && !Array.isArray(value);
const objectOf = (value: unknown): Json => (isObject(value) ? value : {});
const textOf = (value: unknown): string => (typeof value === "string" ? value : "");

const METHODS = ["get", "post", "put", "patch", "delete"];

/** Follows references into the components of the document; anything else as it is. */
function resolve(document: Json, value: unknown): Json {
  const found = objectOf(value);
  const reference = textOf(found.$ref);
  if (!reference.startsWith("#/")) return found;
  return objectOf(
    reference
      .slice(2)
      .split("/")
      .reduce<unknown>((at, key) => objectOf(at)[key], document),
  );
}

/** A schema in a word or two: "number", "one of heavy, all", "list". */
function typeWords(document: Json, value: unknown): string {
  const schema = resolve(document, value);
  if (Array.isArray(schema.enum)) return `one of ${schema.enum.map(String).join(", ")}`;
  if (schema.const !== undefined) return JSON.stringify(schema.const);
  const choices = [schema.anyOf, schema.oneOf].find(Array.isArray);
  if (choices) return [...new Set(choices.map((one) => typeWords(document, one)))].join(" or ");
  if (schema.format === "binary") return "file";
  if (schema.type === "array" && objectOf(schema.items).format === "binary") return "one or more files";
  if (schema.type === "array") return `list of ${typeWords(document, schema.items)}`;
  if (Array.isArray(schema.type)) return schema.type.map(String).join(" or ");
  return textOf(schema.type) || "value";
}

function bodyFields(document: Json, operation: Json): FieldView[] {
  const content = objectOf(objectOf(operation.requestBody).content);
  return Object.entries(content).flatMap(([type, entry]) => {
    const schema = resolve(document, objectOf(entry).schema);
    const required = Array.isArray(schema.required) ? schema.required : [];
    return Object.entries(objectOf(schema.properties)).map(([name, property]) => ({
      name,
      place: type === "application/json" ? "JSON body" : "form",
      type: typeWords(document, property),
      required: required.includes(name),
      words: textOf(resolve(document, property).description) || textOf(objectOf(property).description),
    }));
  });
}

function parameterFields(document: Json, operation: Json): FieldView[] {
  const parameters = Array.isArray(operation.parameters) ? operation.parameters : [];
  return parameters.map((one) => {
    const parameter = resolve(document, one);
    const schema = resolve(document, parameter.schema);
    return {
      name: textOf(parameter.name),
      place: "address",
      type: typeWords(document, parameter.schema),
      required: parameter.required === true,
      words: textOf(parameter.description) || textOf(schema.description),
    };
  });
}

/**
 * The calls of an OpenAPI 3.1 document in its order, with their fields and answers in words. What is not described in
 * the document is left out, never guessed.
 *
 * @example describeCalls({ paths: { "/a": { get: { operationId: "a", summary: "A" } } } })[0].path // "/a"
 */
export function describeCalls(document: object): CallView[] {
  const root = objectOf(document);
  return Object.entries(objectOf(root.paths)).flatMap(([path, item]) =>
    METHODS.flatMap((method) => {
      const operation = objectOf(objectOf(item)[method]);
      if (Object.keys(operation).length === 0) return [];
      const answers = Object.entries(objectOf(operation.responses)).map(([status, answer]) => ({
        status,
        words: textOf(resolve(root, answer).description),
      }));
      return [
        {
          id: textOf(operation.operationId),
          method: method.toUpperCase(),
          path,
          summary: textOf(operation.summary),
          fields: [...parameterFields(root, operation), ...bodyFields(root, operation)],
          answers: answers.toSorted((a, b) => a.status.localeCompare(b.status)),
        },
      ];
    }),
  );
}
