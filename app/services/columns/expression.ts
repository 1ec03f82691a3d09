import type { MathNode, OperatorNode, Unit } from "mathjs";
import type { ColumnData } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import { LARGEST_NUMBER } from "../../lib/intake/numbers.ts";
import { quoteFound } from "../../lib/text/escape.ts";
import type { EnergyKind } from "../../lib/views.ts";
import { factorBetween, isEnergy, math, unitOfColumn, unitOfEnergy } from "./expression-units.ts";

/** A column as a formula sees it. */
export interface FormulaInput {
  id: string;
  name: string;
  kind: "energy" | "property";
  unit: string | null;
  energyKind: EnergyKind | null;
  temperature: number | null;
}

/** Longest formula, and how deep its brackets may go. */
const MAX_TEXT = 500;
const MAX_NODES = 200;
const MAX_DEPTH = 40;

/** A formula that was read: what it needs, what it gives, and how. */
export interface Formula {
  text: string;
  /** Names in the text and the columns they mean, each once. */
  inputs: { name: string; column: string }[];
  kind: "energy" | "property";
  unit: string | null;
  /** Kind and temperature that follow from those of the inputs, for an energy. */
  energyKind: EnergyKind;
  temperature: number | null;
  /** What to look at twice. */
  remarks: string[];
  compute(columns: ReadonlyMap<string, ColumnData>, frames: number): ColumnData;
  /** Frames that have all columns it needs, and those of them in which it divides by zero. */
  inputsIn(columns: ReadonlyMap<string, ColumnData>, frames: number): { having: number; byZero: number };
}

type Operation =
  | { kind: "number"; value: number }
  | { kind: "column"; id: string }
  | { kind: "negate"; of: Operation }
  | { kind: "+" | "-" | "*" | "/"; left: Operation; right: Operation; factor: number };

/** What a part of a formula gives. */
interface Typed {
  operation: Operation;
  unit: Unit | null;
  /** As written of the column that it came from. */
  text: string | null;
}

export function refuseFormula(message: string): DomainError {
  return new DomainError("invalid", "The formula is not right", message, {
    faults: [{ field: "expression", message }],
  });
}

/**
 * Puts plain symbols in the place of quoted names, which may hold anything: `"HF/def2-SVP"` and `G_low` both name a column.
 */
function withSymbols(text: string): { plain: string; quoted: Map<string, string> } {
  const quoted = new Map<string, string>();
  let free = "q";
  while (text.includes(free)) free += "q";
  const plain = text.replace(/"([^"]*)"|`([^`]*)`|“([^”]*)”/g, (_, a, b, c) => {
    const symbol = `${free}${quoted.size}`;
    quoted.set(symbol, String(a ?? b ?? c));
    return ` ${symbol} `;
  });
  return { plain, quoted };
}

/**
 * Reads a formula over columns: numbers, names, + - * / and brackets, nothing else. It is parsed and walked with a list of
 * what is allowed; no text of a user is ever evaluated. Units are checked part by part: only what measures the same is
 * added, and converted to the unit of what stands before it.
 *
 * @throws DomainError invalid with the place at fault
 * @example readFormula('E_high + (G_low - E_low)', columns).energyKind // "free"
 */
export function readFormula(text: string, columns: readonly FormulaInput[]): Formula {
  if (text.trim() === "") throw refuseFormula("Write a formula, such as E_high + (G_low - E_low).");
  if (text.length > MAX_TEXT) throw refuseFormula(`A formula has at most ${MAX_TEXT} characters.`);
  const { plain, quoted } = withSymbols(text.replaceAll("−", "-").replaceAll("×", "*").replaceAll("÷", "/"));
  if (/["`“”]/.test(plain)) throw refuseFormula("A quote round a name is not closed.");
  const node = parsed(plain);
  const walk = new FormulaWalk(columns, quoted);
  const result = walk.type(node, 0);
  if (walk.inputs.size === 0) throw refuseFormula("The formula names no column.");
  const energy = isEnergy(result.unit);
  return {
    text: text.trim(),
    inputs: [...walk.inputs].map(([name, column]) => ({ name, column })),
    kind: energy ? "energy" : "property",
    unit: result.unit === null ? null : (result.text ?? null),
    ...kindOf(walk.used(), columns),
    compute: (data, frames) => compute(result.operation, [...walk.used()], data, frames),
    inputsIn: (data, frames) => {
      const found = { having: 0, byZero: 0 };
      for (let k = 0; k < frames; k++) {
        if ([...walk.used()].some((id) => data.get(id)?.present[k] !== 1)) continue;
        found.having += 1;
        if (dividesByZero(result.operation, data, k)) found.byZero += 1;
      }
      return found;
    },
  };
}

function parsed(plain: string): MathNode {
  try {
    return math.parse(plain);
  } catch (error) {
    const at = /\(char (\d+)\)/.exec(error instanceof Error ? error.message : "")?.[1];
    const where =
      at === undefined ? "" : ` near "${quoteFound(plain.slice(Math.max(0, Number(at) - 1)).trim())}"`;
    throw refuseFormula(
      `The formula does not read as one${where}. Write names, numbers, + - * / and brackets.`,
    );
  }
}

class FormulaWalk {
  readonly inputs = new Map<string, string>();
  private nodes = 0;

  constructor(
    private readonly columns: readonly FormulaInput[],
    private readonly quoted: ReadonlyMap<string, string>,
  ) {}

  used(): Set<string> {
    return new Set(this.inputs.values());
  }

  type(node: MathNode, depth: number): Typed {
    this.nodes += 1;
    if (this.nodes > MAX_NODES || depth > MAX_DEPTH) throw refuseFormula("The formula is too long.");
    if (math.isConstantNode(node)) return this.number(node.value);
    if (math.isSymbolNode(node)) return this.column(node.name);
    if (math.isParenthesisNode(node)) return this.type(node.content, depth + 1);
    if (math.isOperatorNode(node)) return this.operator(node as OperatorNode, depth);
    throw refuseFormula(`"${this.shown(node)}" is not allowed: names, numbers, + - * / and brackets are.`);
  }

  /** A part of the formula as it was written: quoted names stand as symbols in the tree. */
  private shown(node: MathNode): string {
    let text = node.toString();
    for (const [symbol, name] of this.quoted) text = text.replaceAll(symbol, `"${name}"`);
    return quoteFound(text);
  }

  private number(value: unknown): Typed {
    if (typeof value !== "number" || !Number.isFinite(value)) {
      throw refuseFormula(`"${quoteFound(String(value))}" is no number.`);
    }
    return { operation: { kind: "number", value }, unit: null, text: null };
  }

  private column(symbol: string): Typed {
    const name = this.quoted.get(symbol) ?? symbol;
    const column = this.columns.find((one) => one.name === name.trim());
    if (column === undefined) {
      const there = this.columns.slice(0, 8).map((one) => `"${one.name}"`);
      throw refuseFormula(
        `There is no column "${quoteFound(name)}". There is ${there.join(", ") || "none yet"}${this.columns.length > 8 ? ", ..." : ""}. Put names with other signs than letters in quotes.`,
      );
    }
    const energy = column.kind === "energy" && column.unit !== null;
    const unit = energy ? unitOfEnergy(column.unit ?? "") : unitOfColumn(column.unit);
    if (unit === undefined) {
      throw refuseFormula(`The unit of "${column.name}", ${column.unit}, is not known; it cannot take part.`);
    }
    this.inputs.set(column.name, column.id);
    return { operation: { kind: "column", id: column.id }, unit, text: column.unit };
  }

  private operator(node: OperatorNode, depth: number): Typed {
    const { op, args, implicit } = node;
    const shown = this.shown(node);
    if (implicit) {
      throw refuseFormula(
        `Between "${shown}" stands no sign: write + - * or /, and put names with blanks in quotes.`,
      );
    }
    const [first, second] = args;
    if (first === undefined) throw refuseFormula("The formula is not complete.");
    const left = this.type(first, depth + 1);
    if (second === undefined) {
      if (op === "+") return left;
      if (op === "-") return { ...left, operation: { kind: "negate", of: left.operation } };
    } else if (op === "+" || op === "-") return this.sum(op, left, this.type(second, depth + 1), shown);
    else if (op === "*" || op === "/") return this.product(op, left, this.type(second, depth + 1));
    throw refuseFormula(`The sign "${op}" is not allowed: + - * / and brackets are.`);
  }

  private sum(kind: "+" | "-", left: Typed, right: Typed, shown: string): Typed {
    const words = (one: Typed) => (one.unit === null ? "a plain number" : (one.text ?? "another unit"));
    const fits =
      left.unit === null ? right.unit === null : right.unit !== null && left.unit.equalBase(right.unit);
    if (!fits) {
      throw refuseFormula(`${words(left)} and ${words(right)} cannot be added or subtracted: "${shown}".`);
    }
    const factor = left.unit === null || right.unit === null ? 1 : factorBetween(right.unit, left.unit);
    const operation = { kind, left: left.operation, right: right.operation, factor };
    return { operation, unit: left.unit, text: left.text };
  }

  private product(kind: "*" | "/", left: Typed, right: Typed): Typed {
    const operation = { kind, left: left.operation, right: right.operation, factor: 1 };
    if (right.unit === null) return { operation, unit: left.unit, text: left.text };
    if (left.unit === null && kind === "*") return { operation, unit: right.unit, text: right.text };
    if (kind === "/" && left.unit?.equalBase(right.unit)) {
      // What measures the same leaves a plain number.
      return {
        operation: { ...operation, factor: factorBetween(right.unit, left.unit) },
        unit: null,
        text: null,
      };
    }
    const one = left.unit ?? math.unit("1");
    const unit = (kind === "*"
      ? math.multiply(one, right.unit)
      : math.divide(one, right.unit)) as unknown as Unit;
    const text =
      kind === "*" ? productText(left.text ?? "1", right.text ?? "1") : `${left.text ?? "1"}/(${right.text})`;
    return { operation, unit, text: text.slice(0, 40) };
  }
}

/**
 * Unit of a product; equal units are squared, brackets keep a quotient together.
 *
 * @example productText("kcal/mol", "kcal/mol") // "(kcal/mol)²"
 */
function productText(left: string, right: string): string {
  const whole = (text: string) => (/[ /]/.test(text) ? `(${text})` : text);
  return left === right && !/[²³]$/.test(left) ? `${whole(left)}²` : `${whole(left)} ${whole(right)}`;
}

const ORDER: readonly EnergyKind[] = ["electronic", "zero-point", "enthalpy", "free"];

/** An energy to which thermal terms were added is one with them: the furthest kind among the inputs, and its temperature. */
function kindOf(
  used: ReadonlySet<string>,
  columns: readonly FormulaInput[],
): Pick<Formula, "energyKind" | "temperature" | "remarks"> {
  const inputs = columns.filter(({ id, kind }) => used.has(id) && kind === "energy");
  const kinds = inputs.map(({ energyKind }) => energyKind ?? "electronic");
  const energyKind = ORDER[Math.max(0, ...kinds.map((kind) => ORDER.indexOf(kind)))] ?? "electronic";
  const temperatures = [
    ...new Set(inputs.flatMap(({ temperature }) => (temperature === null ? [] : [temperature]))),
  ];
  const remarks =
    temperatures.length > 1
      ? [`The inputs belong to different temperatures: ${temperatures.map((t) => `${t} K`).join(", ")}.`]
      : [];
  return { energyKind, temperature: temperatures.length === 1 ? (temperatures[0] ?? null) : null, remarks };
}

/** Frame by frame; a value is missing where any of the inputs is, and where the result is no finite number. */
function compute(
  operation: Operation,
  used: readonly string[],
  columns: ReadonlyMap<string, ColumnData>,
  frames: number,
): ColumnData {
  const values = new Float64Array(frames);
  const present = new Uint8Array(frames);
  const data = used.map((id) => columns.get(id));
  for (let k = 0; k < frames; k++) {
    if (data.some((one) => one?.present[k] !== 1)) continue;
    const value = valueAt(operation, columns, k);
    if (!(Math.abs(value) <= LARGEST_NUMBER)) continue;
    values[k] = value;
    present[k] = 1;
  }
  return { values, present };
}

function dividesByZero(operation: Operation, columns: ReadonlyMap<string, ColumnData>, k: number): boolean {
  if (operation.kind === "number" || operation.kind === "column") return false;
  if (operation.kind === "negate") return dividesByZero(operation.of, columns, k);
  if (operation.kind === "/" && valueAt(operation.right, columns, k) === 0) return true;
  return dividesByZero(operation.left, columns, k) || dividesByZero(operation.right, columns, k);
}

function valueAt(operation: Operation, columns: ReadonlyMap<string, ColumnData>, k: number): number {
  switch (operation.kind) {
    case "number":
      return operation.value;
    case "column":
      return columns.get(operation.id)?.values[k] ?? Number.NaN;
    case "negate":
      return -valueAt(operation.of, columns, k);
  }
  const left = valueAt(operation.left, columns, k);
  const right = valueAt(operation.right, columns, k) * operation.factor;
  switch (operation.kind) {
    case "+":
      return left + right;
    case "-":
      return left - right;
    case "*":
      return left * right;
    case "/":
      return left / right;
  }
}
