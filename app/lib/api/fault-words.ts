import type { z } from "zod";
import type { Fault } from "../errors.ts";
import { quoteFound } from "../text/escape.ts";

/** What would be right in a field, where its type alone does not say it. By the last part of its name. */
const RIGHT: Readonly<Record<string, string>> = {
  level: "Name a level by its id or its name.",
  reference: "Name a level by its id or its name.",
  window: "An energy window is a number of kcal/mol from 0, or null for none.",
  energyTolerance: "An energy tolerance is a number of kcal/mol from 0, or null for none.",
  rmsdTolerance: "An RMSD tolerance is a number of Å from 0 to 100.",
  temperature: "A temperature is a number of K above zero and up to 100,000, such as 298.15.",
  energyTemperature: "A temperature is a number of K above zero and up to 100,000, such as 298.15.",
  rule: "linear is a plain mean, r-6 and r-3 are for distances, circular is for angles.",
  energyKind: "free energies carry their energyTemperature.",
  wait: "Give the seconds to wait as a number, such as 30.",
  page: "Pages are counted from 1.",
  answers: 'Send {"answers": [{"id": "energy-unit", "option": "kcal/mol"}]}.',
  id: "It is the id of a question of intake.",
  option: "It is the id of one of the question's options; for a level, its name.",
  reason: "Give the reason in up to 500 characters.",
};

const TYPES: Readonly<Record<string, string>> = {
  string: "a text",
  number: "a number",
  int: "a whole number",
  boolean: "true or false",
  array: "a list",
  object: "an object with named fields",
  null: "null",
};

/** A value as a message quotes it. */
function shown(input: unknown): string {
  if (typeof input === "string") return input === "" ? "an empty text" : `"${quoteFound(input)}"`;
  if (typeof input === "number") return Number.isFinite(input) ? String(input) : "a number out of range";
  if (typeof input === "boolean" || input === null) return String(input);
  return Array.isArray(input) ? "a list" : "an object";
}

const found = (input: unknown) => (input === undefined ? "" : `; found ${shown(input)}`);

function oneOf(values: readonly unknown[]): string {
  const words = values.map((value) => (typeof value === "string" ? `"${value}"` : String(value)));
  const last = words.pop() ?? "";
  return words.length === 0 ? last : `${words.join(", ")} or ${last}`;
}

type Issue = z.core.$ZodIssue;

function sizeWords(issue: Extract<Issue, { code: "too_small" | "too_big" }>): string {
  const { input, origin, inclusive = true } = issue;
  const least = issue.code === "too_small";
  const bound = Number(least ? issue.minimum : issue.maximum);
  if (origin === "string") {
    if (least && bound === 1) return "It is empty.";
    const length = typeof input === "string" ? `; found ${[...input].length}` : "";
    return `Expected ${least ? "at least" : "at most"} ${bound} characters${length}.`;
  }
  if (origin === "array") return `Expected ${least ? "at least" : "at most"} ${bound} of them.`;
  const words = least ? (inclusive ? "from" : "above") : inclusive ? "up to" : "below";
  return `Expected a number ${words} ${bound}${found(input)}.`;
}

/** The branch that was meant: one that only takes an empty text never is. */
function unionWords(issue: Extract<Issue, { code: "invalid_union" }>): string {
  const branches = issue.errors.filter(
    (branch) => !branch.some((one) => one.code === "invalid_value" && one.values.includes("")),
  );
  const types = branches.map((branch) => (branch[0]?.code === "invalid_type" ? branch[0].expected : null));
  if (branches.length > 1 && types.every((type) => type !== null)) {
    return `Expected ${types.map((type) => TYPES[type] ?? type).join(" or ")}${found(issue.input)}.`;
  }
  const meant = branches.find((branch) => branch[0]?.code !== "invalid_type") ?? branches[0] ?? [];
  return meant[0] ? problemWords({ ...meant[0], input: issue.input } as Issue) : "It cannot be read.";
}

function problemWords(issue: Issue): string {
  const { input } = issue;
  switch (issue.code) {
    case "invalid_type":
      if (input === undefined && issue.path.length > 0) return "It is missing.";
      return `Expected ${TYPES[issue.expected] ?? issue.expected}${found(input)}.`;
    case "invalid_value":
      return `Expected ${oneOf(issue.values)}${found(input)}.`;
    case "too_small":
    case "too_big":
      return sizeWords(issue);
    case "invalid_union":
      return unionWords(issue);
    case "not_multiple_of":
      return `Expected a whole number${found(input)}.`;
    case "invalid_format":
    case "custom":
      // Schemas that look at the form of a text bring their own words.
      return /^Invalid/.test(issue.message)
        ? `It cannot be read${found(input)}.`
        : `${issue.message}${input === undefined || input === "" ? "" : ` Found ${shown(input)}.`}`;
    default:
      return `It cannot be read${found(input)}.`;
  }
}

function rightOf(field: string): string {
  const name = field.split(".").at(-1) ?? "";
  return Object.hasOwn(RIGHT, name) ? (RIGHT[name] ?? "") : "";
}

/**
 * What a schema found wrong, in plain words: what was found, and what would be right. The parse has to be given
 * `reportInput: true`, or nothing that was found can be named.
 *
 * @example faultsOf(schema.safeParse({ window: "x" }, { reportInput: true }).error)
 * // [{ field: "window", message: 'Expected a number; found "x". An energy window is ...' }]
 */
export function faultsOf(error: z.ZodError): Fault[] {
  return error.issues.flatMap((issue): Fault[] => {
    if (issue.code === "unrecognized_keys") {
      const at = issue.path.length === 0 ? "" : `${issue.path.join(".")}.`;
      return issue.keys.map((key) => ({
        field: `${at}${quoteFound(key)}`,
        message: `There is no field "${quoteFound(key)}".`,
      }));
    }
    const field = issue.path.join(".");
    const problem = problemWords(issue);
    const right = rightOf(field);
    const message = right === "" || problem.includes(right) ? problem : `${problem} ${right}`;
    return [field === "" ? { message } : { field, message }];
  });
}
